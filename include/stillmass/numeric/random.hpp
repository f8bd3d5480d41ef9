#pragma once

#include <cstdint>

namespace stillmass::numeric {

/// Random numbers as a function of (seed, case, draw), by Philox 4x32-10 (Salmon et al. 2011, through Random123): the
/// same numbers in whatever order and on however many threads they are asked for.
class Random {
 public:
  explicit Random(std::uint64_t seed) : seed_(seed) {}
  /// Uniform in the open interval (0, 1), 52 bits.
  double uniform(std::uint64_t case_number, std::uint32_t draw) const;
  /// Standard normal (Box-Muller on two uniforms of the same counter).
  double normal(std::uint64_t case_number, std::uint32_t draw) const;

 private:
  std::uint64_t seed_;
};

}  // namespace stillmass::numeric
