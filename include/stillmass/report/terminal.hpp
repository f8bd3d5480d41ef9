#pragma once

#include <string>
#include <vector>

#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"
#include "stillmass/survey/survey.hpp"

namespace stillmass::report {

/// Results as plain text for a terminal of 80 columns or more: UTF-8, every line ended.
std::string text(const step::CheckResult& result);
/// What of a spectrum is shown beside levels and peaks.
struct SpectrumView {
  bool density = false;        ///< spectral densities instead of amplitudes
  bool third_octaves = false;  ///< levels of the third-octave bands
};
std::string text(const step::SpectrumResult& result, const SpectrumView& view = {});
std::string text(const step::BumpResult& result);
std::string text(const step::RunupResult& result);
std::string text(const step::AbsorberResult& result);
/// One screen: the verdict and the lines to act on, what is not known, cautions.
std::string text(const survey::SurveyResult& result);

/// Rows under a header, columns as wide as they must be; columns of numbers to the right.
std::string aligned(const std::vector<std::string>& header, const std::vector<std::vector<std::string>>& rows);

/// Broken at blanks into lines of at most `width`; those after the first stand behind `indent` blanks more.
std::string wrapped(const std::string& text, std::size_t width, std::size_t indent);

}  // namespace stillmass::report
