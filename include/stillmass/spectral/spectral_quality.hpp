#pragma once

#include <optional>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/channel.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// What a spectrum says about the quality of the recording: mains_hum, low_frequency_slope, aliasing_suspected,
/// near_noise_floor, mounting_resonance (a sensor is true to 10 % up to 0.3 of its mounted resonance: the response
/// of one degree of freedom, 1 / (1 - r^2)). The thresholds are common practice and stand beside the rules in the
/// source. line_frequency_hz: of the supply; without it 50 and 60 Hz are tried.
std::vector<base::Finding> spectral_findings(const Spectrum& spectrum, const recording::Channel& channel,
                                             std::optional<double> line_frequency_hz = std::nullopt);

/// Where the low-frequency slope of an acceleration spectrum (settling, thermal drift, cable motion) ends: integrating
/// below it shows the slope, not the machine. Nothing where there is no such slope.
std::optional<double> slope_end_hz(const Spectrum& spectrum);

}  // namespace stillmass::spectral
