#pragma once

#include <array>
#include <cstddef>

namespace stillmass::recording {

/// Samples that are looked at together, to pass over them quickly where none of them has a rare property.
inline constexpr std::size_t strip = 64;

/// True where test(x + i) holds for one i below `strip`. Every test is made, without a branch, and the counts are added
/// up by halves: so the compiler makes vector code of a simple test.
template <class Test>
bool any_in_strip(const double* x, Test test) {
  std::array<double, strip> count;
  for (std::size_t i = 0; i < strip; ++i) count[i] = test(x + i) ? 1.0 : 0.0;
  for (std::size_t half = strip / 2; half > 0; half /= 2) {
    for (std::size_t i = 0; i < half; ++i) count[i] += count[i + half];
  }
  return count[0] > 0.0;
}

}  // namespace stillmass::recording
