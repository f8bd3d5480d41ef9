#pragma once

#include <cstddef>
#include <span>

#include "stillmass/spectral/tone.hpp"

#include "spectral/line_noise.hpp"

namespace stillmass::spectral {

/// Frequency and amplitude of the steady tone that makes the peak at line k of a measured spectrum, from the ratio of
/// two lines of its lobe. There are three lines at least on each side of k.
Tone fit_tone(const Spectrum& spectrum, std::span<const double> floor, const LineNoise& noise, std::size_t k);

}  // namespace stillmass::spectral
