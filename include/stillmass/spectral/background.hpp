#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

// The machine stopped and its neighbours running: what of the running spectrum is not the machine's. Everything here
// takes machine and background as uncorrelated, so that their powers add, and needs the same channel in the same
// quantity. Powers of bands are compared whatever the lines; line by line only spectra of the same lines and window:
// rebinning is right for noise and wrong for tones.

/// Background of more than this share of the running level, both r.m.s. velocity, makes the severity doubtful.
/// Source: ISO 10816-1, annex on background vibration (25 %; from memory).
inline constexpr double doubtful_background_share = 0.25;

/// A band of the running machine with its background taken off.
struct BackgroundLevel {
  base::Interval band_hz;
  base::Estimate running;     ///< r.m.s., SI unit of the quantity
  base::Estimate background;  ///< r.m.s.
  base::Estimate share;       ///< background over running, ratio
  bool is_doubtful = false;   ///< share above `doubtful_background_share`
  /// sqrt(running^2 - background^2); u of both. Refused (`background-covers-machine`): the difference of the powers is
  /// not positive or less than twice its standard uncertainty.
  base::Answer<base::Estimate> machine;
};

/// Throws `Error` (usage): other quantities, a band that one of them does not have.
BackgroundLevel without_background(const Spectrum& running, const Spectrum& background, base::Interval band_hz);

/// Line by line. The spectrum has the running one's averages; its `spread` is such that the relative uncertainty of a
/// line is spread / sqrt(effective_averages), background included.
struct DifferenceSpectrum {
  Spectrum spectrum;                     ///< density running - background, 0 where that is negative
  std::vector<std::optional<double>> u;  ///< of the density, SI unit squared per Hz; absent for a single block
  std::vector<char> is_covered;          ///< not above the background by twice u: the line may be all background
  std::size_t covered = 0;               ///< how many
};

/// Throws `Error` (usage): quantities, lines or windows that differ, peak hold, no blocks. Bands: `without_background`,
/// not sums over these lines, whose cut at 0 lifts them.
DifferenceSpectrum line_difference(const Spectrum& running, const Spectrum& background);

struct BackgroundToneOptions {
  double least_share = doubtful_background_share;  ///< background over running amplitude from which a tone is marked
  double tolerance_hz = 0.0;  ///< of the frequencies; at least half a line and twice their standard uncertainty
};

/// A tone of the running machine that the background has too.
struct BackgroundTone {
  std::size_t running = 0;     ///< which of the tones
  std::size_t background = 0;  ///< the strongest within the tolerance
  base::Estimate share;        ///< background over running amplitude, ratio
  bool is_marked = false;      ///< share at least `least_share`: perhaps not the machine's
  base::Interval alone_rms;    ///< the machine's own amplitude, whatever the phase between the two tones: from the
                               ///< difference to the sum of the amplitudes
};

/// Those of `running` with a partner in `background`, in the order of `running`. `line_hz`: of the coarser spectrum.
std::vector<BackgroundTone> background_tones(std::span<const Tone> running, std::span<const Tone> background,
                                             double line_hz, const BackgroundToneOptions& options = {});

}  // namespace stillmass::spectral
