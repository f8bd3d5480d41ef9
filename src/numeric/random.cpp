#include "stillmass/numeric/random.hpp"

#include <cmath>
#include <numbers>

#include <Random123/philox.h>

namespace stillmass::numeric {
namespace {

struct Pair {
  double first;
  double second;
};

// 52 random bits, shifted by half a step so that neither 0 nor 1 comes out.
double to_unit(std::uint32_t high, std::uint32_t low) {
  const std::uint64_t bits = (std::uint64_t{high} << 20) ^ (std::uint64_t{low} >> 12);
  return (static_cast<double>(bits) + 0.5) * 0x1p-52;
}

Pair draw_pair(std::uint64_t seed, std::uint64_t case_number, std::uint32_t draw) {
  const r123::Philox4x32 philox;
  const r123::Philox4x32::ctr_type counter{
      {static_cast<std::uint32_t>(case_number), static_cast<std::uint32_t>(case_number >> 32), draw, 0}};
  const r123::Philox4x32::key_type key{{static_cast<std::uint32_t>(seed), static_cast<std::uint32_t>(seed >> 32)}};
  const auto words = philox(counter, key);
  return {to_unit(words[0], words[1]), to_unit(words[2], words[3])};
}

}  // namespace

double Random::uniform(std::uint64_t case_number, std::uint32_t draw) const {
  return draw_pair(seed_, case_number, draw).first;
}

double Random::normal(std::uint64_t case_number, std::uint32_t draw) const {
  const auto [a, b] = draw_pair(seed_, case_number, draw);
  return std::sqrt(-2.0 * std::log(a)) * std::cos(2.0 * std::numbers::pi * b);
}

}  // namespace stillmass::numeric
