#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <cstdint>
#include <numbers>
#include <vector>

#include "stillmass/numeric/random.hpp"

#include "spectral/signals.hpp"

namespace stillmass::tests {

/// Blows of a rolling bearing's flaw, each ringing one mode.
struct Blows {
  double per_second = 3.5848 * 24.63;  ///< outer ring of a bearing with nine balls, by the kinematic formula
  double slip = 0.01;                  ///< standard deviation of the time from blow to blow, relative
  double ringing_hz = 3200.0;
  double damping = 0.03;
  double peak = 1.0;
  double modulation = 0.0;  ///< of the blows' strength, once a turn
  double turns_hz = 24.63;
};

inline void add_blows(std::vector<double>& x, double rate_hz, const Blows& blows, std::uint64_t seed) {
  const numeric::Random random(seed);
  const double omega = 2.0 * std::numbers::pi * blows.ringing_hz;
  const double length_s = 12.0 / (blows.damping * omega);
  double at = 0.0;
  for (std::uint32_t i = 0; at * rate_hz < static_cast<double>(x.size()); ++i) {
    const double strength =
        blows.peak * (1.0 + blows.modulation * std::cos(2.0 * std::numbers::pi * blows.turns_hz * at));
    const auto first = static_cast<std::size_t>(std::ceil(at * rate_hz));
    const auto end = std::min(x.size(), static_cast<std::size_t>((at + length_s) * rate_hz));
    for (std::size_t n = first; n < end; ++n) {
      const double t = static_cast<double>(n) / rate_hz - at;
      x[n] += strength * std::exp(-blows.damping * omega * t) *
              std::sin(omega * std::sqrt(1.0 - blows.damping * blows.damping) * t);
    }
    at += (1.0 + blows.slip * random.normal(77, i)) / blows.per_second;
  }
}

}  // namespace stillmass::tests
