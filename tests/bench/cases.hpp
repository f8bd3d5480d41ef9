#pragma once

#include <cmath>
#include <cstddef>
#include <vector>

namespace bench {

/// A machine as it may turn out to be: absorber's mass over modal mass, damping ratio, natural frequency over the
/// nominal one. Mass 10 % and frequency 1 % apart, damping by a third, all even over their ranges.
struct Case {
  double mass_ratio = 0.0;
  double damping = 0.0;
  double frequency = 1.0;
};

/// Additive recurrences with the fractional parts of sqrt 2, sqrt 3, sqrt 5: the same cases here and in peers.py.
inline std::vector<Case> cases(std::size_t count) {
  const auto part = [](double x) { return x - std::floor(x); };
  std::vector<Case> all;
  for (std::size_t i = 0; i < count; ++i) {
    const auto n = static_cast<double>(i + 1);
    all.push_back({0.1 * (0.9 + 0.2 * part(n * std::sqrt(2.0))), 0.01 * (0.67 + 0.66 * part(n * std::sqrt(3.0))),
                   0.99 + 0.02 * part(n * std::sqrt(5.0))});
  }
  return all;
}

}  // namespace bench
