#pragma once

#include <string>
#include <utility>
#include <vector>

#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"
#include "stillmass/survey/survey.hpp"

namespace stillmass::report {

/// A file by its name and content.
struct NamedText {
  std::string name;
  std::string text;
};

/// The curves of a result as CSV: comma, decimal point, one header line with units, numbers that read back exactly, an
/// empty cell where a value is not known. SI units unless the header says otherwise.
std::vector<NamedText> csv(const std::vector<step::CheckResult>& results);
std::vector<NamedText> csv(const step::SpectrumResult& result);
std::vector<NamedText> csv(const step::BumpResult& result);
std::vector<NamedText> csv(const step::RunupResult& result);
std::vector<NamedText> csv(const step::AbsorberResult& result);
std::vector<NamedText> csv(const survey::SurveyResult& result);

}  // namespace stillmass::report
