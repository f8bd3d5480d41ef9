#pragma once

#include <span>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/half_power.hpp"

namespace stillmass::modal {

/// Damping ratio from the logarithmic decrement d = ln(x_k / x_{k+n}) / n: z = d / sqrt(4 pi^2 + d^2). Exact for one
/// viscously damped degree of freedom. d >= 0, else `Error` (internal).
double damping_of_decrement(double decrement);
/// d = 2 pi z / sqrt(1 - z^2), 0 <= z < 1.
double decrement_of_damping(double damping_ratio);
/// The decrement per cycle of successive peaks of one sign, by a straight line through their logarithms.
/// At least two peaks, all > 0, else `Error` (internal).
double logarithmic_decrement(std::span<const double> peaks);

/// One mode of a ring-down, read from its envelope and phase.
struct RingDown {
  base::Estimate frequency;  ///< |pole| / 2 pi, Hz
  base::Estimate damping_ratio;
  double fitted_s = 0.0;  ///< length of the decay above the noise that was used
  double decay_db = 0.0;  ///< how far the envelope fell over it
};

/// Frequency and damping of the one mode in `band_hz` of a free decay (samples after contact has ended, offset
/// removed). The band is shifted to 0 Hz and passed through a Hann-shaped smoother, which leaves the rate of decay of
/// an exponential as it is; then a weighted straight line goes through the logarithm of the envelope and one through
/// the phase, from where the smoother is full to where the envelope comes within a factor 3 of its noise floor.
/// Uncertainty: of the lines, with as many independent points as the smoother leaves.
/// Refuses `short-decay`: fewer than 4 smoother lengths or 6 dB of decay.
base::Answer<RingDown> ring_down(std::span<const double> samples, double rate_hz, base::Interval band_hz);

}  // namespace stillmass::modal
