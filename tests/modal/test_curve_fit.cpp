#include <cmath>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/curve_fit.hpp"
#include "stillmass/numeric/random.hpp"

#include "oracle/one_degree.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using Complex = std::complex<double>;

namespace {

struct Lines {
  std::vector<double> frequency_hz;
  std::vector<Complex> accelerance;
  std::vector<double> u;

  std::vector<modal::MeasuredResponse> measured() const { return {{accelerance, u}}; }
};

Lines lines_of(const std::vector<oracle::OneDegree>& modes, double lo, double hi, double noise = 0.0,
               std::uint64_t seed = 1) {
  const numeric::Random random(seed);
  Lines lines;
  std::uint64_t k = 0;
  for (double f = lo; f <= hi; f += 0.125, ++k) {
    lines.frequency_hz.push_back(f);
    lines.accelerance.push_back(oracle::accelerance(modes, f) +
                                noise * Complex(random.normal(k, 0), random.normal(k, 1)));
    lines.u.push_back(1.0);
  }
  return lines;
}

}  // namespace

TEST_CASE("two close modes are found exactly from a rough start") {
  const std::vector<oracle::OneDegree> modes{{24.2, 0.010, 210.0}, {24.9, 0.018, 340.0}};
  const Lines lines = lines_of(modes, 18.0, 32.0);
  const std::vector<modal::FrequencyAndDamping> start{{24.0, 0.02}, {25.2, 0.01}};
  const auto fit = modal::curve_fit(lines.frequency_hz, lines.measured(), start);
  REQUIRE(fit);
  for (std::size_t r = 0; r < 2; ++r) {
    CHECK(fit->modes[r].system.frequency_hz == Approx(modes[r].frequency_hz).epsilon(1e-7));
    CHECK(fit->modes[r].system.damping_ratio == Approx(modes[r].damping_ratio).epsilon(1e-5));
    CHECK(fit->modes[r].mass_kg() == Approx(modes[r].mass_kg).epsilon(1e-5));
    CHECK(std::arg(fit->modes[r].strength[0]) == Approx(0.0).margin(1e-5));
  }
  const Complex s(0.0, 2.0 * std::numbers::pi * 24.5);
  CHECK(std::abs(fit->accelerance(0, s) - oracle::accelerance(modes, 24.5)) < 1e-8);
}

TEST_CASE("modes outside the band are carried by the residual terms") {
  const std::vector<oracle::OneDegree> modes{{6.0, 0.02, 800.0}, {24.2, 0.010, 210.0}, {91.0, 0.015, 120.0}};
  const Lines lines = lines_of(modes, 20.0, 29.0);
  const std::vector<modal::FrequencyAndDamping> start{{24.0, 0.02}};
  const auto fit = modal::curve_fit(lines.frequency_hz, lines.measured(), start);
  REQUIRE(fit);
  // The residual terms leave out (w/w_r)^4 and more of the modes outside.
  CHECK(fit->modes[0].system.frequency_hz == Approx(24.2).epsilon(1e-5));
  CHECK(fit->modes[0].system.damping_ratio == Approx(0.01).epsilon(2e-3));
  CHECK(fit->modes[0].mass_kg() == Approx(210.0).epsilon(2e-3));
}

TEST_CASE("the exponential window leaves no trace in the poles") {
  // A(s) at s = i w + 1 / tau is what windowed signals give, exactly.
  const oracle::OneDegree mode{20.0, 0.01, 50.0};
  const double decay = 1.0;
  Lines lines;
  for (double f = 15.0; f <= 25.0; f += 0.125) {
    const Complex s(decay, 2.0 * std::numbers::pi * f);
    const double w = mode.omega();
    lines.frequency_hz.push_back(f);
    lines.accelerance.push_back(s * s / (mode.mass_kg * (s * s + 2.0 * 0.01 * w * s + w * w)));
    lines.u.push_back(1.0);
  }
  const std::vector<modal::FrequencyAndDamping> start{{20.2, 0.02}};
  const auto fit = modal::curve_fit(lines.frequency_hz, lines.measured(), start, decay);
  REQUIRE(fit);
  CHECK(fit->modes[0].system.damping_ratio == Approx(0.01).epsilon(1e-6));
  CHECK(fit->modes[0].mass_kg() == Approx(50.0).epsilon(1e-6));
}

TEST_CASE("uncertainties of the fit are those of the errors it makes") {
  const std::vector<oracle::OneDegree> modes{{24.2, 0.010, 210.0}, {31.5, 0.018, 340.0}};
  const std::vector<modal::FrequencyAndDamping> start{{24.2, 0.01}, {31.5, 0.02}};
  double square[3] = {};
  double product = 0.0;
  double correlation = 0.0;
  constexpr int trials = 80;
  for (int trial = 1; trial <= trials; ++trial) {
    const Lines lines = lines_of(modes, 15.0, 45.0, 0.005, static_cast<std::uint64_t>(trial));
    const auto fit = modal::curve_fit(lines.frequency_hz, lines.measured(), start);
    REQUIRE(fit);
    const auto& mode = fit->modes[0];
    const double z = (mode.system.damping_ratio - 0.01) / mode.damping_u;
    const double m = (mode.mass_kg() - 210.0) / (210.0 * 210.0 * mode.strength_u[0]);
    square[0] += std::pow((mode.system.frequency_hz - 24.2) / mode.frequency_u, 2) / trials;
    square[1] += z * z / trials;
    square[2] += m * m / trials;
    product += z * m / trials;
    correlation += mode.correlation[1][2] / trials;
  }
  // Mean squares of 80 normalised errors: 1 +- 3 sqrt(2 / 80).
  for (const double mean : square) CHECK(mean == Approx(1.0).epsilon(0.48));
  // The mass is read from the height: more damping, less mass.
  CHECK(correlation < -0.5);
  CHECK(product == Approx(correlation).margin(0.35));
}

TEST_CASE("a response at another point has the same poles and its own sign") {
  const std::vector<oracle::OneDegree> modes{{24.2, 0.010, 210.0}, {31.5, 0.018, 340.0}};
  const Lines lines = lines_of(modes, 15.0, 45.0);
  std::vector<Complex> other;
  for (const double f : lines.frequency_hz) {
    other.push_back(0.5 * oracle::accelerance(modes[0], f) - 2.0 * oracle::accelerance(modes[1], f));
  }
  const std::vector<modal::MeasuredResponse> both{{lines.accelerance, lines.u}, {other, lines.u}};
  const std::vector<modal::FrequencyAndDamping> start{{24.0, 0.02}, {31.0, 0.02}};
  const auto fit = modal::curve_fit(lines.frequency_hz, both, start);
  REQUIRE(fit);
  CHECK((fit->modes[0].strength[1] / fit->modes[0].strength[0]).real() == Approx(0.5).epsilon(1e-6));
  CHECK((fit->modes[1].strength[1] / fit->modes[1].strength[0]).real() == Approx(-2.0).epsilon(1e-6));
}

TEST_CASE("more modes than lines are refused") {
  const Lines lines = lines_of({{24.2, 0.010, 210.0}}, 24.0, 24.3);
  const std::vector<modal::FrequencyAndDamping> start{{24.0, 0.02}, {24.2, 0.02}};
  const auto fit = modal::curve_fit(lines.frequency_hz, lines.measured(), start);
  REQUIRE(!fit);
  CHECK(fit.refusal().code == "no-fit");
}
