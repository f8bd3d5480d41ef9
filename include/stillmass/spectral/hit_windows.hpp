#pragma once

#include <cstddef>
#include <optional>
#include <vector>

namespace stillmass::spectral {

/// How the block of a hammer blow is weighted before its transform. A block starts `pre_trigger` frames before the
/// blow.
///
/// The force window lets the blow pass and shuts out the noise after it. The exponential window exp(-t / tau) lets a
/// ring-down that outlasts the block die within it. It is put on force and response alike: multiplying both by
/// exp(-t / tau) turns H(s) into H(s + 1/tau) exactly, so every pole's decay rate grows by 1/tau and nothing else
/// changes. A damping ratio found at natural frequency f is too large by 1/(2 pi f tau).
/// Source: e.g. Fladung & Rost, Mech. Syst. Signal Process. 11 (1997) (from memory); the shift follows from the
/// algebra.
struct HitWindows {
  std::size_t pre_trigger = 0;  ///< frames before the blow; each channel's mean over them is taken off (sensor offset)
  std::optional<double> force_s;  ///< the force window is 1 so long from the block's start, then falls by half a cosine
  double force_fall_s = 0.0;      ///< how long the fall takes, s, >= 0
  std::optional<double> decay_s;  ///< time constant tau of the exponential window, > 0
};

/// Weights of n samples. Throw `Error` (usage) for a negative or zero duration where the above forbids it.
std::vector<double> force_weights(const HitWindows& windows, std::size_t n, double rate_hz);
std::vector<double> response_weights(const HitWindows& windows, std::size_t n, double rate_hz);

/// The time constant that brings a block of that duration down to `remainder` of its start (0.01: common practice).
double decay_for(double duration_s, double remainder = 0.01);

}  // namespace stillmass::spectral
