#pragma once

#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// r.m.s. value in a band: square root of the integral of the density over the band. Line k stands for the frequencies
/// within half a line of it (line 0 and rate/2 for the half that exists), so a line on the edge counts in part; over
/// the whole spectrum it is the r.m.s. of the windowed blocks (Parseval). What lies below `first_line` is not counted.
///
/// u: from the scatter of the blocks (`spread`) with the correlation of neighbouring lines, as for independent blocks;
/// degrees of freedom: effective averages - 1. Absent for one block and for peak hold.
/// Throws `Error` (usage): a band that does not overlap the given lines.
base::Estimate band_rms(const Spectrum& spectrum, base::Interval band_hz);

/// A third-octave band with its r.m.s. value.
struct BandLevel {
  double centre_hz = 0.0;  ///< exact: 1000 * 10^(k/10)
  base::Interval band_hz;  ///< centre times 10^(-+1/20)
  base::Estimate rms;
};

/// The third-octave bands (base ten, IEC 61260-1, from memory) that lie within `range_hz` and the given lines and are
/// at least two noise bandwidths wide: narrower ones the spectrum does not resolve.
std::vector<BandLevel> third_octaves(const Spectrum& spectrum, base::Interval range_hz);

}  // namespace stillmass::spectral
