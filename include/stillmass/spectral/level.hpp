#pragma once

#include <cstddef>
#include <optional>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// r.m.s. value in a band: square root of the integral of the density over the band. Line k stands for the frequencies
/// within half a line of it (line 0 and rate/2 for the half that exists), so a line on the edge counts in part; over
/// the whole spectrum it is the r.m.s. of the windowed blocks (Parseval). What lies below `first_line` is not counted.
///
/// An integrated spectrum is summed so that neither noise nor tones come out high at the lowest lines: the measured
/// density of a line times the integral of (2 pi f)^-2n over its part of the band; and each of `strong_lines` as a tone
/// with its whole power at its own frequency. A tone counts whole within the closed band, less and less within half a
/// line outside it, so that a tone on the edge is not a matter of chance. It is lost where it stands below
/// `least_low_limit_hz` (quantity.hpp): what lies there cannot be told from the sensor's offset.
/// Within 0.5 % of the true velocity for steady tones from that limit on and for noise even over a lobe; the rectangle
/// from 2.5 lines on, below which a tone runs into its own mirror image.
///
/// u: from the scatter of the blocks (`spread`) with the correlation of neighbouring lines, as for independent blocks,
/// of integrated spectra also from the frequencies of the strong lines and from lobes that no single tone explains;
/// degrees of freedom: effective averages - 1. Absent for one block and for peak hold.
/// Throws `Error` (usage): a band that does not overlap the given lines.
base::Estimate band_rms(const Spectrum& spectrum, base::Interval band_hz);

/// A third-octave band with its r.m.s. value.
struct BandLevel {
  double centre_hz = 0.0;   ///< exact: 1000 * 10^(k/10)
  double nominal_hz = 0.0;  ///< as it is called: 31.5, 40, 50, ...
  base::Interval band_hz;   ///< centre times 10^(-+1/20)
  base::Estimate rms;
};

/// Third-octave bands of a range, and those of them that the lines do not resolve.
struct ThirdOctaves {
  std::vector<BandLevel> bands;            ///< without a gap, ascending
  std::size_t unresolved = 0;              ///< bands within the range and the given lines that are not in `bands`
  std::optional<double> resolved_from_hz;  ///< nominal frequency of the first in `bands`; absent where there is none
};

/// The third-octave bands (base ten, IEC 61260-1, from memory) that lie within `range_hz` and the given lines and are
/// at least two noise bandwidths wide: narrower ones the spectrum does not resolve, and they are counted only. Levels
/// as `band_rms`, but a strong line counts in one band alone, so the bands add up.
ThirdOctaves third_octaves(const Spectrum& spectrum, base::Interval range_hz);

/// Nominal mid-band frequency of the third octave 1000 * 10^(k/10) Hz: 1, 1.25, 1.6, 2, 2.5, 3.15, 4, 5, 6.3, 8 times a
/// power of ten (IEC 61260-1, from memory).
double nominal_third_octave_hz(int k);

}  // namespace stillmass::spectral
