#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// The lobes of a measured spectrum that stand out of what is around them: the 32 at most that matter most to a
/// velocity integrated from it, in order of frequency. Frequency and power from the lines of the lobe that are free of
/// the sensor's offset, by least squares over the window's own lobe, those of the others taken off. Empty for peak
/// hold, no blocks.
std::vector<StrongLine> strong_lines(const Spectrum& measured);

/// True for windows that end in a step: their side lobes fall by 6 dB an octave only.
bool has_far_skirts(Window window);

/// What a tone of mean square 1, so many lines from 0, puts on the lines first, first + 1, ... of a density that is
/// summed over the lines: all of them add up to 1. Its mirror image beyond 0 is left out.
void lobe_shares(Window window, double noise_bandwidth_bins, double tone_lines, std::size_t first,
                 std::span<double> shares);

}  // namespace stillmass::spectral
