#include <cmath>
#include <numbers>
#include <random>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/numeric/resample.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

constexpr double pi = std::numbers::pi;

// Times of a logger of 100 Hz whose clock jitters by up to 40 % of a step.
std::vector<double> jittered_times(std::size_t count) {
  const numeric::Random random(7);
  std::vector<double> times(count);
  for (std::size_t i = 0; i < count; ++i) {
    times[i] = (static_cast<double>(i) + 0.8 * (random.uniform(i, 0) - 0.5)) / 100.0;
  }
  return times;
}

}  // namespace

TEST_CASE("a polynomial of the fifth degree is brought to an even grid without error") {
  const auto times = jittered_times(60);
  const auto signal = [](double t) { return 3.0 + t * (2.0 - t * (5.0 + t * (1.0 - t * (4.0 + 7.0 * t)))); };
  std::vector<double> values;
  for (const double t : times) values.push_back(signal(t));
  const auto even = numeric::to_even_grid(times, values, 0.01, 100.0, 55);
  for (std::size_t i = 0; i < even.values.size(); ++i) {
    CHECK(even.values[i] == Approx(signal(0.01 + static_cast<double>(i) / 100.0)).epsilon(1e-12));
  }
  CHECK(even.error_max < 1e-10);
}

TEST_CASE("the stated error bounds the true error of a tone up to a quarter of the half rate") {
  const auto times = jittered_times(2000);
  const double frequency = GENERATE(2.0, 6.0, 12.0);
  const auto signal = [&](double t) { return std::sin(2.0 * pi * frequency * t + 0.3); };
  std::vector<double> values;
  for (const double t : times) values.push_back(signal(t));
  const auto even = numeric::to_even_grid(times, values, 0.0, 100.0, 1995);
  double error_max = 0.0;
  double square = 0.0;
  for (std::size_t i = 0; i < even.values.size(); ++i) {
    const double error = std::abs(even.values[i] - signal(static_cast<double>(i) / 100.0));
    error_max = std::max(error_max, error);
    square += error * error;
  }
  const double error_rms = std::sqrt(square / static_cast<double>(even.values.size()));
  INFO(frequency << " Hz: max " << error_max << " of " << even.error_max << ", rms " << error_rms << " of "
                 << even.error_rms);
  CHECK(error_max <= even.error_max);
  CHECK(error_rms <= even.error_rms);
  CHECK(even.error_rms < 6.0 * error_rms + 1e-12);  // and it is not idle
}

TEST_CASE("a grid beyond the samples is a fault") {
  const auto times = jittered_times(20);
  const std::vector<double> values(20, 1.0);
  CHECK_THROWS_AS(numeric::to_even_grid(times, values, -0.1, 100.0, 5), base::Error);
  CHECK_THROWS_AS(numeric::to_even_grid(times, values, 0.0, 100.0, 40), base::Error);
}
