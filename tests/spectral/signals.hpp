#pragma once

#include <cmath>
#include <cstddef>
#include <cstdint>
#include <numbers>
#include <vector>

#include "stillmass/numeric/random.hpp"

namespace stillmass::tests {

/// White Gaussian noise of unit variance; another case, another noise.
inline std::vector<double> noise(std::size_t n, std::uint64_t seed, std::uint64_t case_number = 0) {
  const numeric::Random random(seed);
  std::vector<double> x(n);
  for (std::size_t i = 0; i < n; ++i) x[i] = random.normal(case_number, static_cast<std::uint32_t>(i));
  return x;
}

/// Adds amplitude * cos(2 pi f t + phase), amplitude being the r.m.s. value.
inline void add_tone(std::vector<double>& x, double rate_hz, double frequency_hz, double rms, double phase = 0.0) {
  for (std::size_t i = 0; i < x.size(); ++i) {
    x[i] += std::numbers::sqrt2 * rms *
            std::cos(2.0 * std::numbers::pi * frequency_hz * static_cast<double>(i) / rate_hz + phase);
  }
}

}  // namespace stillmass::tests
