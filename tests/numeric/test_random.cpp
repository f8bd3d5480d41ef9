#include <algorithm>
#include <cmath>
#include <cstdint>
#include <vector>

#include "stillmass/numeric/random.hpp"

#include "support/catch.hpp"

using stillmass::numeric::Random;

TEST_CASE("the first uniform number of seed 0 is the published answer of Philox 4x32-10") {
  // Known-answer test of Random123 (Salmon et al. 2011) for counter 0 and key 0: 6627e8d5 e169c58d ...; from memory.
  CHECK(Random(0).uniform(0, 0) == (static_cast<double>(0x6627e8d5e169cULL) + 0.5) * 0x1p-52);
}

TEST_CASE("a random number depends on seed, case and draw only") {
  const Random random(42);
  const double later = random.normal(7, 9);
  CHECK(random.normal(7, 8) != later);
  CHECK(random.normal(8, 9) != later);
  CHECK(Random(43).normal(7, 9) != later);
  CHECK(random.normal((std::uint64_t{1} << 32) + 7, 9) != later);
  CHECK(Random((std::uint64_t{1} << 32) + 42).normal(7, 9) != later);
  CHECK(Random(42).normal(7, 9) == later);
}

TEST_CASE("uniform numbers fill the open interval evenly") {
  const Random random(5);
  constexpr int count = 100000;
  std::vector<double> values(count);
  for (int i = 0; i < count; ++i)
    values[static_cast<std::size_t>(i)] = random.uniform(3, static_cast<std::uint32_t>(i));
  std::sort(values.begin(), values.end());
  CHECK(values.front() > 0.0);
  CHECK(values.back() < 1.0);
  double distance = 0.0;
  for (int i = 0; i < count; ++i) {
    distance = std::max(distance, std::abs(values[static_cast<std::size_t>(i)] - (i + 0.5) / count));
  }
  // Kolmogorov-Smirnov: 1.95 / sqrt(n) is passed once in a thousand seeds.
  CHECK(distance < 1.95 / std::sqrt(count));
}

TEST_CASE("normal numbers have mean 0, variance 1, the kurtosis and the tails of a normal distribution") {
  const Random random(11);
  constexpr int count = 400000;
  double sum = 0.0;
  double square = 0.0;
  double fourth = 0.0;
  double beside = 0.0;
  int beyond = 0;
  double last = 0.0;
  for (int i = 0; i < count; ++i) {
    const double x = random.normal(static_cast<std::uint64_t>(i), 2);
    sum += x;
    square += x * x;
    fourth += x * x * x * x;
    beside += x * last;
    beyond += std::abs(x) > 1.959964 ? 1 : 0;
    last = x;
  }
  // Four standard deviations of each estimate: sqrt(1/n), sqrt(2/n), sqrt(96/n), sqrt(1/n), sqrt(.05 .95/n).
  CHECK(std::abs(sum / count) < 4.0 * std::sqrt(1.0 / count));
  CHECK(std::abs(square / count - 1.0) < 4.0 * std::sqrt(2.0 / count));
  CHECK(std::abs(fourth / count - 3.0) < 4.0 * std::sqrt(96.0 / count));
  CHECK(std::abs(beside / count) < 4.0 * std::sqrt(1.0 / count));
  CHECK(std::abs(static_cast<double>(beyond) / count - 0.05) < 4.0 * std::sqrt(0.05 * 0.95 / count));
}
