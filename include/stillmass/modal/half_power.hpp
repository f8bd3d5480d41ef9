#pragma once

#include <cstddef>
#include <span>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/interval.hpp"

namespace stillmass::modal {

/// What a frequency response relates to force.
enum class ResponseKind { receptance, mobility, accelerance };

/// Damping ratio and natural frequency (Hz) of one viscously damped degree of freedom.
struct FrequencyAndDamping {
  double frequency_hz = 0.0;
  double damping_ratio = 0.0;
};

/// From the two half-power frequencies f1 < f2, exactly (r = f / fn, z the damping ratio):
///   receptance:  r^2 = 1 - 2 z^2 -+ 2 z sqrt(1 - z^2)    so  tan(2 asin z) = (f2^2 - f1^2) / (f2^2 + f1^2)
///   mobility:    r2 - r1 = 2 z, r1 r2 = 1
///   accelerance: r^-2 = 1 - 2 z^2 +- 2 z sqrt(1 - z^2)   so  tan(2 asin z) = (f1^-2 - f2^-2) / (f1^-2 + f2^-2)
/// For z up to 0.38 (receptance, accelerance), 1 (mobility). Throws `Error` (internal) unless 0 < f1 < f2.
/// Source: algebra of the one-degree-of-freedom system, e.g. Ewins, Modal Testing (from memory, confirmed).
FrequencyAndDamping from_half_power(double f1, double f2, ResponseKind kind);

/// The half-power frequencies of a given system: the inverse of the above.
base::Interval half_power_frequencies(const FrequencyAndDamping& system, ResponseKind kind);

/// A resonance peak of a measured magnitude.
struct HalfPower {
  FrequencyAndDamping system;
  double peak_frequency_hz = 0.0;
  double peak = 0.0;            ///< magnitude at the peak, between lines
  base::Interval crossings_hz;  ///< where the magnitude is peak / sqrt 2
  double lines = 0.0;           ///< lines across the half-power bandwidth
};

/// The half-power bandwidth of the highest peak of `magnitude` within `near_hz`, on lines `line_hz` apart, the first at
/// 0 Hz. Between lines 1 / |receptance|^2 is taken for a parabola in f^2 through three lines, which is exact for one
/// degree of freedom. `decay_per_s`: 1 / tau of an exponential window exp(-t / tau) on the response, whose share of
/// the damping is taken off: z_true = z_measured - 1 / (tau 2 pi f). `resolution_hz`: what one independent line
/// stands for (1 / block length), where the lines are closer than that by padding with zeros; 0: line_hz.
/// Refuses: `too-few-lines` under `least_lines` independent lines in the bandwidth; `no-half-power-point` where the
/// magnitude rises again before it has fallen to 1/sqrt 2, or the peak stands at an end of the band.
base::Answer<HalfPower> half_power(std::span<const double> magnitude, double line_hz, base::Interval near_hz,
                                   ResponseKind kind, double decay_per_s = 0.0, double resolution_hz = 0.0,
                                   double least_lines = 4.0);

/// Damping without the share of an exponential window of time constant 1 / decay_per_s (CHECKS: Fladung & Rost 1997).
double without_window(double damping_ratio, double frequency_hz, double decay_per_s);

}  // namespace stillmass::modal
