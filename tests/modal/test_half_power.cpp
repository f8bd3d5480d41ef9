#include <cmath>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/half_power.hpp"

#include "oracle/one_degree.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using modal::ResponseKind;

namespace {

double magnitude(const oracle::OneDegree& mode, double f, ResponseKind kind) {
  switch (kind) {
    case ResponseKind::receptance:
      return std::abs(oracle::receptance(mode, f));
    case ResponseKind::mobility:
      return std::abs(oracle::mobility(mode, f));
    case ResponseKind::accelerance:
      return std::abs(oracle::accelerance(mode, f));
  }
  return 0.0;
}

std::vector<double> lines_of(const oracle::OneDegree& mode, double line_hz, ResponseKind kind) {
  std::vector<double> lines;
  for (int k = 0; k < 2000; ++k) lines.push_back(magnitude(mode, k * line_hz, kind));
  return lines;
}

constexpr ResponseKind kinds[] = {ResponseKind::receptance, ResponseKind::mobility, ResponseKind::accelerance};

}  // namespace

TEST_CASE("the half-power frequencies lie at half the power of the peak") {
  for (const ResponseKind kind : kinds) {
    for (const double z : {0.001, 0.02, 0.1, 0.3}) {
      const oracle::OneDegree mode{25.0, z, 100.0};
      const auto edges = modal::half_power_frequencies({25.0, z}, kind);
      // Height of the peak from the closed form: 1/(2 z sqrt(1 - z^2)) over k or m, 1/(2 z) over sqrt(k m) for
      // mobility.
      const double w = 2.0 * std::numbers::pi * 25.0;
      double peak = 1.0 / (2.0 * z * mode.mass_kg);
      if (kind != ResponseKind::mobility) peak /= std::sqrt(1.0 - z * z);
      if (kind == ResponseKind::mobility) peak /= w;
      if (kind == ResponseKind::receptance) peak /= w * w;
      CHECK(magnitude(mode, edges.lo, kind) == Approx(peak / std::numbers::sqrt2).epsilon(1e-10));
      CHECK(magnitude(mode, edges.hi, kind) == Approx(peak / std::numbers::sqrt2).epsilon(1e-10));
      const auto back = modal::from_half_power(edges.lo, edges.hi, kind);
      CHECK(back.frequency_hz == Approx(25.0).epsilon(1e-12));
      CHECK(back.damping_ratio == Approx(z).epsilon(1e-9));
    }
  }
}

TEST_CASE("D1 and D2: the common shortcut errs by what CHECKS says, the exact relation does not") {
  struct Row {
    double z;
    double receptance;  // error of (f2 - f1) / (2 fp), percent
    double accelerance;
  };
  for (const Row& row : {Row{0.01, 0.020, 0.040}, Row{0.05, 0.50, 1.01}, Row{0.1, 2.06, 4.23}, Row{0.2, 9.13, 20.6}}) {
    const auto of_receptance = modal::half_power_frequencies({1.0, row.z}, ResponseKind::receptance);
    const auto of_accelerance = modal::half_power_frequencies({1.0, row.z}, ResponseKind::accelerance);
    const double r_peak = std::sqrt(1.0 - 2.0 * row.z * row.z);
    const double shortcut_r = of_receptance.width() / (2.0 * r_peak);
    const double shortcut_a = of_accelerance.width() * r_peak / 2.0;
    // Half a unit of the last digit given, and a little.
    CHECK(100.0 * (shortcut_r / row.z - 1.0) == Approx(row.receptance).epsilon(0.01));
    CHECK(100.0 * (shortcut_a / row.z - 1.0) == Approx(row.accelerance).epsilon(0.01));
  }
}

TEST_CASE("one degree of freedom is read exactly from few lines, whatever lies between them") {
  for (const ResponseKind kind : kinds) {
    for (const double z : {0.01, 0.05, 0.2}) {
      const oracle::OneDegree mode{24.137, z, 210.0};
      const double line_hz = 2.0 * z * 24.137 / 4.6;
      const auto answer = modal::half_power(lines_of(mode, line_hz, kind), line_hz,
                                            {24.137 * (1.0 - 3.0 * z), 24.137 * (1.0 + 4.0 * z)}, kind);
      REQUIRE(answer);
      CHECK(answer->system.frequency_hz == Approx(24.137).epsilon(1e-8));
      CHECK(answer->system.damping_ratio == Approx(z).epsilon(1e-6));
    }
  }
}

TEST_CASE("a bandwidth under four lines is refused with the length to record") {
  const oracle::OneDegree mode{24.0, 0.005, 210.0};
  const auto answer = modal::half_power(lines_of(mode, 0.125, ResponseKind::accelerance), 0.125, {20.0, 28.0},
                                        ResponseKind::accelerance);
  REQUIRE(!answer);
  CHECK(answer.refusal().code == "too-few-lines");
  CHECK(answer.refusal().measure == "record blocks of at least 16.7 s");  // 4 lines over 0.24 Hz
}

TEST_CASE("a peak that never falls to half power is refused") {
  const std::vector<oracle::OneDegree> modes{{24.0, 0.05, 210.0}, {25.5, 0.05, 210.0}};
  std::vector<double> lines;
  for (int k = 0; k < 2000; ++k) lines.push_back(std::abs(oracle::accelerance(modes, 0.05 * k)));
  const auto answer = modal::half_power(lines, 0.05, {22.0, 25.0}, ResponseKind::accelerance);
  REQUIRE(!answer);
  CHECK(answer.refusal().code == "no-half-power-point");
}

TEST_CASE("D9: the damping of an exponential window is taken off") {
  // f = 20 Hz, tau = 1 s, z = 0.01: measured 0.017958.
  CHECK(modal::without_window(0.017958, 20.0, 1.0) == Approx(0.01).epsilon(1e-4));
  const oracle::OneDegree measured{20.0, 0.0179577, 50.0};
  const auto answer = modal::half_power(lines_of(measured, 0.1, ResponseKind::accelerance), 0.1, {15.0, 25.0},
                                        ResponseKind::accelerance, 1.0);
  REQUIRE(answer);
  CHECK(answer->system.damping_ratio == Approx(0.01).epsilon(1e-4));
}

TEST_CASE("half-power frequencies that do not rise are a fault") {
  CHECK_THROWS_AS(modal::from_half_power(10.0, 9.0, ResponseKind::mobility), base::Error);
}
