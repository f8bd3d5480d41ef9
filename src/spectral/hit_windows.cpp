#include "stillmass/spectral/hit_windows.hpp"

#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::spectral {

namespace {

void check(const HitWindows& windows) {
  const auto positive = [](const char* what, double seconds) {
    if (!(seconds > 0.0))
      throw base::usage_error({}, fmt::format("{} of {} s", what, seconds), "give a positive duration");
  };
  if (windows.force_s) positive("a force window", *windows.force_s);
  if (windows.decay_s) positive("a time constant of the exponential window", *windows.decay_s);
  if (!(windows.force_fall_s >= 0.0)) {
    throw base::usage_error({}, fmt::format("a fall of the force window over {} s", windows.force_fall_s));
  }
}

/// 1 up to `open`, half a cosine over `fall`, then 0.
double force_window(double t, double open, double fall) {
  if (t < open) return 1.0;
  if (t >= open + fall) return 0.0;
  return 0.5 * (1.0 + std::cos(std::numbers::pi * (t - open) / fall));
}

}  // namespace

std::vector<double> response_weights(const HitWindows& windows, std::size_t n, double rate_hz) {
  check(windows);
  std::vector<double> w(n, 1.0);
  if (windows.decay_s) {
    for (std::size_t i = 0; i < n; ++i) w[i] = std::exp(-static_cast<double>(i) / (rate_hz * *windows.decay_s));
  }
  return w;
}

std::vector<double> force_weights(const HitWindows& windows, std::size_t n, double rate_hz) {
  std::vector<double> w = response_weights(windows, n, rate_hz);
  if (windows.force_s) {
    for (std::size_t i = 0; i < n; ++i) {
      w[i] *= force_window(static_cast<double>(i) / rate_hz, *windows.force_s, windows.force_fall_s);
    }
  }
  return w;
}

double decay_for(double duration_s, double remainder) { return -duration_s / std::log(remainder); }

}  // namespace stillmass::spectral
