#pragma once

#include <cstddef>
#include <optional>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// A peak that stands out of the noise around it, taken as a steady tone.
struct Tone {
  base::Estimate frequency;      ///< Hz
  base::Estimate amplitude_rms;  ///< SI unit of the spectrum's quantity
  double floor_density = 0.0;    ///< of the noise around it, SI unit squared per Hz
  double prominence = 0.0;       ///< density of the peak over that of the floor
  double breadth = 1.0;          ///< power under the peak over that of a steady tone of this amplitude: about 1 for a
                                 ///< steady tone, more where the frequency wanders or a resonance makes the peak
  std::optional<double> spread;  ///< of the peak line: near 0 steady, about 1 random
  std::size_t line = 0;
};

struct ToneOptions {
  std::size_t strongest = 20;  ///< at most so many
  double prominence = 4.0;     ///< at least (6 dB: common practice); more where few averages make noise spiky
  std::optional<base::Interval> band_hz;  ///< of the tones given; those outside still count as what leaks in
};

/// The noise floor per line: median over the lines around it (24 on each side, or 8 times the window's lobe if that is
/// more) corrected for the skew of an averaged density (Wilson & Hilferty 1931). Tones do not lift it while they fill
/// less than half of those lines. 0 below the first given line and within the lobe of 0 Hz.
std::vector<double> noise_floor(const Spectrum& spectrum);

/// The tones of a spectrum, strongest first. A peak counts where it stands out by `prominence` and so far that noise of
/// the same floor would do it on one line in a million, and where it is not a side lobe of a stronger one.
///
/// Frequency and amplitude follow from the ratio of two lines, exact for a steady tone and the window's own transform
/// (for Hann, with a = ratio of the greater neighbour to the peak, (2 a - 1) / (a + 1) lines from the peak); the power
/// of the floor is taken off before. Where other tones, or its own image about 0 Hz and rate/2, leak into a tone's
/// lines by more than a tenth of the noise there, place and amplitude are fitted again together with what leaks in:
/// without noise to 1e-4 of a line and 0.1 % for tones more than the window's lobe and one line apart (the rectangle
/// only where a tone stands alone; beside others its u says how far it may be off). u: from the floor's noise on those
/// lines (or the scatter of the blocks if greater). Two tones closer than the window's lobe are one peak here:
/// `close_tones` parts them. Of an integrated spectrum the measured one is used for the ratio. Empty for peak hold or
/// no blocks.
std::vector<Tone> tones(const Spectrum& spectrum, const ToneOptions& options = {});

}  // namespace stillmass::spectral
