#pragma once

#include <algorithm>
#include <cstddef>

#include "stillmass/spectral/impulsive_band.hpp"

namespace stillmass::spectral {

inline constexpr std::size_t least_stretches = 3;  // the median of fewer is no guard against one thump
inline constexpr double least_stretch_s = 0.5;

/// Where bands are looked for.
inline base::Interval search_range_hz(double rate_hz, const BandSearchOptions& options) {
  const double named = options.highest_hz > 0.0 ? options.highest_hz : rate_hz / 2.56;
  return {options.lowest_hz, std::min(named, 0.49 * rate_hz)};
}

/// Less than an octave, or than the narrowest band, leaves no room above the tones of the machine.
inline bool has_room(base::Interval range_hz, double least_width_hz) {
  return range_hz.hi >= 2.0 * range_hz.lo && range_hz.width() >= least_width_hz;
}

}  // namespace stillmass::spectral
