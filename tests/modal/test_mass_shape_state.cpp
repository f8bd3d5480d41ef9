#include <cmath>
#include <vector>

#include "stillmass/modal/headline.hpp"
#include "stillmass/modal/modal_mass.hpp"
#include "stillmass/modal/shape.hpp"
#include "stillmass/modal/state.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using base::Estimate;
using base::Quantity;

TEST_CASE("the height of the accelerance at resonance gives the mass") {
  const Estimate mass =
      modal::mass_from_peak({0.25, 0.005, 4.0, Quantity::ratio}, {0.01, 0.0005, 9.0, Quantity::ratio});
  CHECK(mass.value == Approx(200.0));
  CHECK(*mass.relative() == Approx(std::hypot(0.02, 0.05)).epsilon(1e-12));
  // Welch-Satterthwaite: 0.0029^2 / (0.02^4 / 4 + 0.05^4 / 9).
  CHECK(*mass.dof == Approx(std::pow(0.0029, 2) / (std::pow(0.02, 4) / 4.0 + std::pow(0.05, 4) / 9.0)).epsilon(1e-9));
}

TEST_CASE("an added mass gives the mass that moved before") {
  // m = 200 kg at 25 Hz; with 10 kg more at 25 sqrt(200 / 210).
  const double f1 = 25.0 * std::sqrt(200.0 / 210.0);
  const std::vector<modal::AddedMass> tests{{{10.0, 0.01, {}, Quantity::mass}, {f1, 0.01, {}, Quantity::frequency}}};
  const auto mass = modal::mass_from_added_mass({25.0, 0.01, {}, Quantity::frequency}, tests);
  REQUIRE(mass);
  CHECK(mass->value == Approx(200.0).epsilon(1e-10));
  // By differences: dm/df of either frequency is 2 m / (f (1 - (f1/f0)^2)), about 336 kg/Hz here.
  const auto at = [&](double f0, double f) { return 10.0 / (f0 * f0 / (f * f) - 1.0); };
  const double by0 = (at(25.0 + 1e-5, f1) - at(25.0 - 1e-5, f1)) / 2e-5;
  const double by1 = (at(25.0, f1 + 1e-5) - at(25.0, f1 - 1e-5)) / 2e-5;
  CHECK(*mass->u == Approx(std::hypot(0.01 * by0, 0.01 * by1, 0.01 * 20.0)).epsilon(1e-4));
}

TEST_CASE("several masses are averaged, their scatter and the common start counted") {
  std::vector<modal::AddedMass> tests;
  for (const double dm : {5.0, 10.0, 20.0}) {
    const double f = 25.0 * std::sqrt(200.0 / (200.0 + dm));
    tests.push_back({{dm, 0.0, {}, Quantity::mass}, {f, 0.005, {}, Quantity::frequency}});
  }
  const auto several = modal::mass_from_added_mass({25.0, 0.005, {}, Quantity::frequency}, tests);
  REQUIRE(several);
  CHECK(several->value == Approx(200.0).epsilon(1e-9));
  const auto heaviest = modal::mass_from_added_mass({25.0, 0.005, {}, Quantity::frequency}, std::span(tests).last(1));
  CHECK(*several->u <= *heaviest->u);
  CHECK(*several->u > 0.7 * *heaviest->u);  // f0 is common: three tests do not make it sqrt 3 better
}

TEST_CASE("a frequency that did not fall gives no mass") {
  const std::vector<modal::AddedMass> tests{{{1.0, 0.01, {}, Quantity::mass}, {24.99, 0.01, {}, Quantity::frequency}}};
  const auto mass = modal::mass_from_added_mass({25.0, 0.01, {}, Quantity::frequency}, tests);
  REQUIRE(!mass);
  CHECK(mass.refusal().code == "no-shift");
}

TEST_CASE("a shape has ratios and phases relative to its reference") {
  const std::vector<std::string> points{"a", "b", "c"};
  const std::vector<std::complex<double>> strengths{{0.01, 0.0}, {-0.005, 0.0}, {0.0, 0.02}};
  const auto shape = modal::shape_ratios(points, strengths, 0);
  CHECK(shape[0].ratio == 1.0);
  CHECK(shape[1].ratio == Approx(0.5));
  CHECK(shape[1].phase_deg == Approx(180.0));
  CHECK(shape[2].phase_deg == Approx(90.0));
  CHECK(modal::shape_correlation(strengths, strengths) == Approx(1.0));
}

TEST_CASE("a mass carried to where the mode moves twice as much is a quarter") {
  const Estimate mass = modal::mass_at({200.0, 10.0, {}, Quantity::mass}, {2.0, 0.02, {}, Quantity::ratio});
  CHECK(mass.value == Approx(50.0));
  CHECK(*mass.relative() == Approx(std::hypot(0.05, 0.02)));
}

TEST_CASE("a stopped mode gets the declared shift, a running one does not") {
  modal::Mode mode;
  mode.frequency = {25.0, 0.05, 3.0, Quantity::frequency};
  mode.damping_ratio = {0.01, 0.0005, 3.0, Quantity::ratio};
  mode.state = "stopped";
  mode.correlation[1][2] = mode.correlation[2][1] = -0.9;
  const auto shifted = modal::for_running_design(mode);
  CHECK(*shifted.mode.frequency.u == Approx(std::hypot(0.05, 0.5)));
  CHECK(*shifted.mode.damping_ratio.u == Approx(std::hypot(0.0005, 0.003)));
  REQUIRE(shifted.finding);
  CHECK(shifted.finding->code == base::Code::stopped_shift_assumed);
  // The covariance with the mass stays: correlation times u is what it was.
  CHECK(shifted.mode.correlation[1][2] * *shifted.mode.damping_ratio.u == Approx(-0.9 * 0.0005).epsilon(1e-12));
  mode.state = "running";
  CHECK(!modal::for_running_design(mode).finding);
  CHECK(*modal::for_running_design(mode).mode.frequency.u == 0.05);
}

TEST_CASE("the jackknife of a mean is the standard error of the mean") {
  const std::vector<double> x{3.0, 5.0, 4.0, 8.0};
  std::vector<double> without;
  for (const double one : x) without.push_back((20.0 - one) / 3.0);
  const auto estimate = modal::jackknifed(5.0, without, Quantity::mass);
  CHECK(*estimate.u == Approx(std::sqrt(14.0 / 3.0 / 4.0)).epsilon(1e-12));
  CHECK(*estimate.dof == 3.0);
  CHECK(!modal::jackknifed(5.0, {}, Quantity::mass).u);
}

TEST_CASE("the wider of two statements counts few degrees of freedom") {
  const Estimate few{1.0, 0.10, 2.0, Quantity::ratio};     // 95 %: +- 0.43
  const Estimate many{1.0, 0.15, 100.0, Quantity::ratio};  // 95 %: +- 0.30
  CHECK(*modal::wider(few, many).u == 0.10);
  CHECK(*modal::wider({1.0, {}, {}, Quantity::ratio}, many).u == 0.15);
}

TEST_CASE("methods that disagree are reported, those within their uncertainty are not") {
  const modal::MethodResult fit{
      "curve fit", {25.0, 0.01, {}, Quantity::frequency}, {0.010, 0.0002, {}, Quantity::ratio}};
  modal::MethodResult half{
      "half-power bandwidth", {25.0, 0.01, {}, Quantity::frequency}, {0.0145, 0.0005, {}, Quantity::ratio}};
  CHECK(modal::disagreement(std::vector{fit, half}));
  half.damping_ratio.u = 0.003;
  CHECK(!modal::disagreement(std::vector{fit, half}));
}
