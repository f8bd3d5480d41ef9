#pragma once

#include <string>

#include "stillmass/report/envelope.hpp"
#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"
#include "stillmass/survey/survey.hpp"

namespace stillmass::report {

/// The result of a command as JSON text (schema stillmass.result/1, data/schema), UTF-8, with a line break at its end.
/// Frequencies in Hz, speeds in rpm, velocities in mm/s, everything else in SI units unless the name says otherwise.
/// NaN and infinity never appear: an unknown number is null.
std::string json(const Envelope& envelope, const std::vector<step::CheckResult>& results);
std::string json(const Envelope& envelope, const step::SpectrumResult& result);
std::string json(const Envelope& envelope, const step::BumpResult& result);
std::string json(const Envelope& envelope, const step::RunupResult& result);
std::string json(const Envelope& envelope, const step::AbsorberResult& result);
std::string json(const Envelope& envelope, const survey::SurveyResult& result);

}  // namespace stillmass::report
