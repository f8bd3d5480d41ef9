#pragma once

#include <optional>
#include <vector>

#include "stillmass/survey/survey.hpp"

namespace stillmass::survey {

/// r.m.s. velocity of the line at that frequency; absent where none stands out of the noise there.
std::optional<base::Estimate> line_amplitude(const step::ChannelSpectrum& channel, double frequency_hz);

/// Every point that has a steady recording before and one after, side by side with what was predicted.
std::vector<AfterPoint> compare_stages(const SurveyResult& result);

}  // namespace stillmass::survey
