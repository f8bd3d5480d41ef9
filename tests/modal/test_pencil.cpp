#include <cmath>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/pencil.hpp"
#include "stillmass/numeric/random.hpp"

#include "oracle/one_degree.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

std::vector<double> decay(const std::vector<oracle::OneDegree>& modes, std::size_t count, double rate_hz, double noise,
                          std::uint64_t seed) {
  const numeric::Random random(seed);
  std::vector<double> samples;
  for (std::uint64_t k = 0; k < count; ++k) {
    double x = noise * random.normal(k, 0);
    for (const auto& mode : modes) x += oracle::released(mode, 1.0, static_cast<double>(k) / rate_hz);
    samples.push_back(x);
  }
  return samples;
}

}  // namespace

TEST_CASE("the matrix pencil is exact on two close modes without noise") {
  const std::vector<oracle::OneDegree> modes{{24.2, 0.010, 1.0}, {24.9, 0.020, 1.0}};
  const auto found = modal::matrix_pencil(decay(modes, 240, 120.0, 0.0, 1), 120.0, 2);
  REQUIRE(found.size() == 2);
  for (std::size_t r = 0; r < 2; ++r) {
    CHECK(found[r].system.frequency_hz == Approx(modes[r].frequency_hz).epsilon(1e-8));
    CHECK(found[r].system.damping_ratio == Approx(modes[r].damping_ratio).epsilon(1e-6));
    // Released from rest at 1: real part 1, imaginary part -z / sqrt(1 - z^2).
    CHECK(found[r].amplitude.real() == Approx(1.0).epsilon(1e-6));
    CHECK(found[r].amplitude.imag() == Approx(-modes[r].damping_ratio).epsilon(1e-3));
  }
}

TEST_CASE("least squares of a noisy decay errs as much as it says") {
  const std::vector<oracle::OneDegree> modes{{24.2, 0.010, 1.0}, {31.5, 0.018, 1.0}};
  double square = 0.0;
  constexpr int trials = 40;
  for (int trial = 1; trial <= trials; ++trial) {
    const auto samples = decay(modes, 500, 200.0, 0.05, static_cast<std::uint64_t>(trial));
    const auto start = modal::matrix_pencil(samples, 200.0, 2);
    REQUIRE(start.size() == 2);
    const auto fit = modal::fit_decay(samples, 200.0, start);
    CHECK(fit.residual_rms == Approx(0.05).epsilon(0.15));  // 3 standard errors of 500 values: 10 %
    for (std::size_t r = 0; r < 2; ++r) {
      square += std::pow((fit.sinusoids[r].system.damping_ratio - modes[r].damping_ratio) / fit.damping_u[r], 2);
      square += std::pow((fit.sinusoids[r].system.frequency_hz - modes[r].frequency_hz) / fit.frequency_u[r], 2);
    }
  }
  // Mean square of 160 normalised errors: 1 +- 3 sqrt(2 / 160).
  CHECK(square / (4.0 * trials) == Approx(1.0).epsilon(0.34));
}

TEST_CASE("a pencil of too many or too few samples is a fault") {
  CHECK_THROWS_AS(modal::matrix_pencil(std::vector<double>(5, 1.0), 100.0, 1), base::Error);
  CHECK_THROWS_AS(modal::matrix_pencil(std::vector<double>(2001, 1.0), 100.0, 1), base::Error);
}
