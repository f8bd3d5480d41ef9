#pragma once

#include <vector>

#include "stillmass/report/envelope.hpp"
#include "stillmass/report/page.hpp"
#include "stillmass/report/terminal.hpp"
#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"
#include "stillmass/survey/survey.hpp"

namespace stillmass::report {

/// The result of a command as a page: what it says first, then pictures, tables, what is assumed, inputs.
Page page(const Envelope& envelope, const std::vector<step::CheckResult>& results);
Page page(const Envelope& envelope, const step::SpectrumResult& result, const SpectrumView& view = {});
Page page(const Envelope& envelope, const step::BumpResult& result);
Page page(const Envelope& envelope, const step::RunupResult& result);
Page page(const Envelope& envelope, const step::AbsorberResult& result);
/// The report of a visit.
Page page(const Envelope& envelope, const survey::SurveyResult& result);

}  // namespace stillmass::report
