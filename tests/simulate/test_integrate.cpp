// The program's integrator against closed forms and against tests/oracle/integrator, which itself is held against
// closed forms first.
#include <cmath>
#include <numbers>

#include "stillmass/simulate/skid.hpp"

#include "oracle/integrator.hpp"
#include "simulate/integrate.hpp"
#include "simulate/skids.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;

numeric::Matrix scalar(double value) {
  numeric::Matrix one(1, 1);
  one(0, 0) = value;
  return one;
}

// Displacement of m = 1, w = 30 rad/s released at rest from 1, in the three regimes of damping.
double released(double zeta, double t) {
  constexpr double w = 30.0;
  if (zeta < 1.0) {
    const double wd = w * std::sqrt(1.0 - zeta * zeta);
    return std::exp(-zeta * w * t) * (std::cos(wd * t) + zeta * w / wd * std::sin(wd * t));
  }
  if (zeta == 1.0) return std::exp(-w * t) * (1.0 + w * t);
  const double root = std::sqrt(zeta * zeta - 1.0);
  const double slow = w * (zeta - root);
  const double fast = w * (zeta + root);
  return (fast * std::exp(-slow * t) - slow * std::exp(-fast * t)) / (fast - slow);
}

oracle::Rows rows_of(const numeric::Matrix& a) {
  oracle::Rows rows;
  for (std::size_t i = 0; i < a.rows(); ++i) rows.emplace_back(a.row(i).begin(), a.row(i).end());
  return rows;
}

}  // namespace

TEST_CASE("the oracle follows the free decay below, at and above critical damping") {
  for (const double zeta : {0.05, 0.7, 1.0, 2.5}) {
    const auto motions = oracle::integrate(
        {{1.0}}, {{2.0 * zeta * 30.0}}, {{900.0}}, [](double) { return std::vector<double>{0.0}; }, {{1.0}, {0.0}, {}},
        1e-4, 100, 60);
    for (std::size_t i = 0; i < motions.size(); ++i) {
      CHECK(motions[i].displacement[0] == Approx(released(zeta, 0.01 * static_cast<double>(i))).margin(1e-10));
    }
  }
}

TEST_CASE("the oracle keeps the energy and the beat of two coupled bodies") {
  // Equal bodies, weak coupling: modes at sqrt(k/m) and sqrt((k + 2 kc)/m).
  const auto motions = oracle::integrate(
      {{2.0, 0.0}, {0.0, 2.0}}, {{0.0, 0.0}, {0.0, 0.0}}, {{220.0, -20.0}, {-20.0, 220.0}},
      [](double) { return std::vector<double>(2, 0.0); }, {{1.0, 0.0}, {0.0, 0.0}, {}}, 1e-3, 100, 50);
  for (std::size_t i = 0; i < motions.size(); ++i) {
    const double t = 0.1 * static_cast<double>(i);
    const double slow = std::cos(10.0 * t);
    const double fast = std::cos(std::sqrt(120.0) * t);
    CHECK(motions[i].displacement[0] == Approx(0.5 * (slow + fast)).margin(1e-8));
    CHECK(motions[i].displacement[1] == Approx(0.5 * (slow - fast)).margin(1e-8));
  }
}

TEST_CASE("the oracle solves a full mass matrix") {
  const auto motions = oracle::integrate(
      {{0.0, 2.0}, {4.0, 1.0}}, {{0.0, 0.0}, {0.0, 0.0}}, {{0.0, 0.0}, {0.0, 0.0}},
      [](double) {
        return std::vector<double>{6.0, 11.0};
      },
      {{0.0, 0.0}, {0.0, 0.0}, {}}, 0.1, 1, 1);
  CHECK(motions[0].acceleration[0] == Approx(2.0));
  CHECK(motions[0].acceleration[1] == Approx(3.0));
}

TEST_CASE("the exponential of a rotation's generator is the rotation") {
  for (const double angle : {0.1, 3.0, 200.0}) {
    numeric::Matrix a(2, 2);
    a(0, 1) = -angle;
    a(1, 0) = angle;
    const auto e = simulate::exponential(a);
    CHECK(e(0, 0) == Approx(std::cos(angle)).margin(1e-12));
    CHECK(e(1, 0) == Approx(std::sin(angle)).margin(1e-12));
  }
}

TEST_CASE("a ramp of force is followed exactly, whatever the step") {
  // Undamped from rest under F = a t: q = a/k (t - sin(w t)/w), q'' = a w/k sin(w t).
  const double m = 3.0;
  const double k = 4800.0;  // w = 40
  for (const double step : {1e-3, 0.05, 0.3}) {
    simulate::Propagator propagator(std::vector<double>{m}, scalar(0.0), scalar(k), step);
    const auto row = propagator.acceleration_row(std::vector<double>{1.0});
    std::vector<double> state(2, 0.0);
    for (int n = 0; n < 20; ++n) {
      propagator.step(state, std::vector<double>{7.0 * n * step}, std::vector<double>{7.0 * (n + 1) * step});
      const double t = (n + 1) * step;
      CHECK(state[0] == Approx(7.0 / k * (t - std::sin(40.0 * t) / 40.0)).epsilon(1e-9).margin(1e-15));
      CHECK(row[0] * state[0] + row[1] * state[1] + row[2] * 7.0 * t ==
            Approx(7.0 * 40.0 / k * std::sin(40.0 * t)).margin(1e-10));
    }
  }
}

TEST_CASE("a tone loses no more than (pi f step)^2 / 3 to the straight lines between its samples") {
  const double f = 148.0;
  const double step = 1.0 / 32768.0;
  simulate::Propagator propagator(std::vector<double>{1.0}, scalar(2.0 * 0.5 * two_pi * 60.0),
                                  scalar(std::pow(two_pi * 60.0, 2)), step);
  std::vector<double> state(2, 0.0);
  const auto force = [&](int n) { return std::vector<double>{std::cos(two_pi * f * n * step)}; };
  double re = 0.0;
  double im = 0.0;
  const int run_in = 32768;
  const int count = 32768 / 4;  // whole turns of 148 Hz
  for (int n = 0; n < run_in + count; ++n) {
    if (n >= run_in) {
      re += 2.0 / count * state[0] * std::cos(two_pi * f * n * step);
      im += 2.0 / count * state[0] * std::sin(two_pi * f * n * step);
    }
    propagator.step(state, force(n), force(n + 1));
  }
  const double w = two_pi * f;
  const double w0 = two_pi * 60.0;
  const double exact = 1.0 / std::hypot(w0 * w0 - w * w, w0 * w);
  const double bound = std::pow(std::numbers::pi * f * step, 2) / 3.0;
  CHECK(std::abs(std::hypot(re, im) / exact - 1.0) < 1.1 * bound);
}

TEST_CASE("the fitted skid moves as the independent integrator says") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 1000, 1) + R"(
[absorber]
point = "centre"
mass_kg = 6
frequency_hz = 19
damping_ratio = 0.05
)"));
  const simulate::Skid skid(file, simulate::Condition::running, true);
  REQUIRE(skid.dofs() == 7);
  const double step = 1.0 / 2000.0;
  auto p = skid.pattern(0, {0.3, 0.1, 0.4}, {0.0, 1.0, 0.0});
  // A force with corners at the steps: linear between them, as the propagator takes it.
  const auto level = [&](int n) { return 100.0 * std::sin(0.7 * n) + 40.0 * std::cos(0.05 * n * n); };
  const auto force_at = [&](double t) {
    const double n = std::floor(t / step + 1e-9);
    const double share = t / step - n;
    auto force = p;
    for (double& each : force) {
      each *= (1.0 - share) * level(static_cast<int>(n)) + share * level(static_cast<int>(n) + 1);
    }
    return force;
  };
  oracle::Rows mass(7, std::vector<double>(7, 0.0));
  for (std::size_t i = 0; i < 7; ++i) mass[i][i] = skid.mass()[i];
  const std::vector<double> rest(7, 0.0);
  const auto motions = oracle::integrate(mass, rows_of(skid.damping()), rows_of(skid.stiffness()), force_at,
                                         {rest, rest, rest}, step / 80.0, 80, 400);

  simulate::Propagator propagator(skid.mass(), skid.damping(), skid.stiffness(), step);
  std::vector<double> state(14, 0.0);
  double largest = 0.0;
  double difference = 0.0;
  for (int n = 0; n < 400; ++n) {
    for (std::size_t i = 0; i < 7; ++i) {
      largest = std::max(largest, std::abs(motions[static_cast<std::size_t>(n)].displacement[i]));
      difference = std::max(difference, std::abs(state[i] - motions[static_cast<std::size_t>(n)].displacement[i]));
    }
    propagator.step(state, force_at(n * step), force_at((n + 1) * step));
  }
  CHECK(largest > 1e-5);
  CHECK(difference / largest < 1e-7);  // the oracle's own error: 80 of its steps in one of the program's
}
