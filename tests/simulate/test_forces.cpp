#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

#include "simulate/forces.hpp"
#include "simulate/hammer.hpp"
#include "simulate/sensors.hpp"
#include "simulate/skids.hpp"
#include "simulate/speed.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using simulate::ShaftMotion;

namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;
const simulate::Drive drive{24.6, 50.0, 0.001, 0.5, 1.0};

}  // namespace

TEST_CASE("a coast-down obeys its law of torque and friction until it stands") {
  const numeric::Random random(1);
  const auto shaft = ShaftMotion::coastdown(drive, 3.0, random, 5);
  const double rated = two_pi * 24.6;
  const auto slope = [&](double speed) { return -speed * speed / (rated * 0.5) - two_pi * 1.0; };
  // The law integrated in fine steps (Runge-Kutta, fourth order), apart from the closed form.
  double speed = shaft.at(3.0).speed;
  double angle = shaft.at(3.0).angle;
  const double step = 1e-4;
  double t = 3.0;
  while (speed > 0.5) {
    const double k1 = slope(speed);
    const double k2 = slope(speed + 0.5 * step * k1);
    const double k3 = slope(speed + 0.5 * step * k2);
    const double k4 = slope(speed + step * k3);
    angle += step * speed + step * step / 6.0 * (k1 + k2 + k3);
    speed += step / 6.0 * (k1 + 2.0 * k2 + 2.0 * k3 + k4);
    t += step;
    REQUIRE(shaft.at(t).speed == Approx(speed).epsilon(1e-8).margin(1e-8));
    REQUIRE(shaft.at(t).angle == Approx(angle).epsilon(1e-10));
    REQUIRE(shaft.at(t).acceleration == Approx(slope(speed)).epsilon(1e-8));
  }
  CHECK(shaft.standstill_s() > t);
  CHECK(shaft.at(shaft.standstill_s() - 1e-6).speed > 0.0);
  CHECK(shaft.at(shaft.standstill_s() + 1e-6).speed == 0.0);
  CHECK(shaft.at(100.0).angle == Approx(shaft.at(shaft.standstill_s()).angle).epsilon(1e-12));
  CHECK(shaft.at(2.9).powered);
  CHECK_FALSE(shaft.at(3.1).powered);
}

TEST_CASE("a steady speed wanders within its bound, and the angle is the integral of the speed") {
  const auto shaft = ShaftMotion::steady(drive, numeric::Random(9), 1);
  const double rated = two_pi * 24.6;
  double lowest = rated;
  double highest = rated;
  for (double t = 0.0; t < 120.0; t += 0.01) {
    const auto now = shaft.at(t);
    lowest = std::min(lowest, now.speed);
    highest = std::max(highest, now.speed);
    const double around = (shaft.at(t + 1e-3).angle - shaft.at(t - 1e-3).angle) / 2e-3;
    CHECK(around == Approx(now.speed).epsilon(1e-8));
  }
  CHECK(lowest >= rated * 0.999);
  CHECK(highest <= rated * 1.001);
  CHECK(highest - lowest > rated * 0.001);
}

TEST_CASE("broad-band force has the variance and the memory of first-order noise") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 1000, 1) + R"(
[[force]]
kind = "ambient"
body = "block"
at_m = [0, 0, 0]
density_n_per_rthz = [0, 2, 0]
corner_hz = 100
)"));
  const simulate::Skid skid(file, simulate::Condition::running, false);
  const double step = 1.0 / 16000.0;
  simulate::Forces forces(file, skid, 0, step);
  constexpr int count = 1000000;
  constexpr int lag = 16;
  std::vector<double> values;
  bool crosswise_only = true;
  for (int n = 0; n < count; ++n) {
    std::vector<double> force(6, 0.0);
    forces.add_next(n * step, {0.0, 0.0, 0.0, false}, 1.0, force);
    crosswise_only = crosswise_only && force[0] == 0.0;
    values.push_back(force[1]);
  }
  CHECK(crosswise_only);
  double square = 0.0;
  double product = 0.0;
  for (std::size_t i = lag; i < values.size(); ++i) {
    square += values[i] * values[i];
    product += values[i] * values[i - lag];
  }
  // integral of d^2 / (1 + (f/fc)^2) over f from 0: d^2 fc pi / 2. Correlation time 1 / (2 pi fc) = 25 samples, so some
  // 20 000 independent values: 1 % standard deviation of the variance.
  CHECK(square / (count - lag) == Approx(4.0 * 100.0 * std::numbers::pi / 2.0).epsilon(0.04));
  CHECK(product / square == Approx(std::exp(-two_pi * 100.0 * lag * step)).epsilon(0.03));
}

TEST_CASE("flow noise goes with the square of the speed, and the pull of the line ends with the current") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 1000, 1) + R"(
[[force]]
kind = "flow"
body = "block"
at_m = [0, 0, 0]
density_n_per_rthz = [1, 0, 0]
[[force]]
kind = "line"
body = "block"
at_m = [0, 0, 0]
multiple = 2
amplitude_n = [0, 8, 0]
[[force]]
kind = "order"
body = "block"
at_m = [0, 0, 0]
multiple = 6
amplitude_n = [0, 0, 10]
)"));
  const simulate::Skid skid(file, simulate::Condition::running, false);
  const auto force_at = [&](const simulate::Shaft& shaft) {
    simulate::Forces forces(file, skid, 0, 1e-4);
    std::vector<double> force(6, 0.0);
    forces.add_next(0.0, shaft, 100.0, force);
    return force;
  };
  const auto full = force_at({0.0, 100.0, 0.0, true});
  const auto half = force_at({0.0, 50.0, 0.0, false});
  CHECK(full[0] != 0.0);
  CHECK(half[0] == Approx(0.25 * full[0]));
  CHECK(full[1] == Approx(8.0));
  CHECK(half[1] == 0.0);
  CHECK(full[2] == Approx(10.0));
  CHECK(half[2] == Approx(2.5));
}

TEST_CASE("a neighbour pushes at its own frequency while the machine stands, and rests during a hammer test") {
  const std::string neighbour = R"(
[[force]]
kind = "neighbour"
body = "block"
at_m = [0, 0, 0]
frequency_hz = 16
amplitude_n = [0, 0, 3]
phase_deg = 60
)";
  const auto force_at = [&](const std::string& kind, double time_s) {
    const auto file = tests::parsed(tests::one_body(tests::recording(kind, 1000, 1) + neighbour));
    const simulate::Skid skid(file, simulate::Condition::stopped, false);
    simulate::Forces forces(file, skid, 0, 1e-4);
    std::vector<double> force(6, 0.0);
    forces.add_next(time_s, {0.0, 0.0, 0.0, false}, 100.0, force);
    return force[2];
  };
  CHECK(force_at("background", 0.0) == Approx(1.5));
  CHECK(force_at("background", 1.0 / 32.0) == Approx(-1.5));
  CHECK(force_at("calibrator", 0.0) == 0.0);
  CHECK_THROWS_AS(
      tests::parsed(tests::one_body(tests::recording("steady", 1000, 1) +
                                    "[[force]]\nkind = \"neighbour\"\nbody = \"block\"\nat_m = [0, 0, 0]\n")),
      base::Error);
}

TEST_CASE("unbalance turns with the shaft and pushes back when the shaft slows") {
  const auto file = tests::parsed(tests::one_body(tests::recording("steady", 1000, 1) + R"(
[[force]]
kind = "unbalance"
body = "block"
at_m = [0, 0, 0]
unbalance_g_mm = 1e6
)"));
  const simulate::Skid skid(file, simulate::Condition::running, false);
  // Position e (cos, sin): the force is minus its second derivative times the mass.
  const double h = 1e-4;
  const auto shaft = ShaftMotion::coastdown(drive, 0.0, numeric::Random(2), 3);
  for (const double t : {0.2, 0.7, 1.9}) {
    simulate::Forces forces(file, skid, 0, 1e-4);
    std::vector<double> force(6, 0.0);
    forces.add_next(t, shaft.at(t), shaft.rated_speed(), force);
    const auto y = [&](double at) { return std::cos(shaft.at(at).angle); };
    const auto z = [&](double at) { return std::sin(shaft.at(at).angle); };
    const double size = std::pow(shaft.at(t).speed, 2);
    CHECK(force[1] == Approx(-(y(t + h) - 2.0 * y(t) + y(t - h)) / (h * h)).margin(1e-4 * size));
    CHECK(force[2] == Approx(-(z(t + h) - 2.0 * z(t) + z(t - h)) / (h * h)).margin(1e-4 * size));
  }
}

TEST_CASE("blows are half-sines, one bounces and one is too hard, as the skid file asks") {
  simulate::Hammer hammer;
  hammer.peak_n = 1000.0;
  hammer.spread = 0.1;
  hammer.tip_s = 0.008;
  hammer.first_s = 1.0;
  hammer.interval_s = 5.0;
  hammer.blows = 6;
  hammer.double_hit = 2;
  hammer.overload = 5;
  hammer.overload_ratio = 2.5;
  const auto pulses = simulate::blows_of(hammer, numeric::Random(4), 8);
  REQUIRE(pulses.size() == 7);
  CHECK(pulses[2].start_s - pulses[1].start_s == Approx(hammer.bounce_s));
  CHECK(pulses[2].peak_n == Approx(0.4 * pulses[1].peak_n));
  CHECK(pulses[5].peak_n == 2500.0);
  for (const auto& pulse : {pulses[0], pulses[1], pulses[3], pulses[4], pulses[6]}) {
    CHECK(std::abs(pulse.peak_n - 1000.0) <= 200.0);
  }
  CHECK(pulses[0].peak_n != pulses[1].peak_n);
  double impulse = 0.0;
  for (double t = 0.99; t < 1.02; t += 1e-6) impulse += simulate::force_at(pulses, t) * 1e-6;
  CHECK(impulse == Approx(2.0 / std::numbers::pi * pulses[0].peak_n * 0.008).epsilon(1e-5));
}

TEST_CASE("the pulse's mean is its width and its edges keep their instants between the samples") {
  const double step = 1.0 / 1000.0;
  const double speed = two_pi * 7.3;
  double sum = 0.0;
  double area = 0.0;
  bool within = true;
  for (int n = 0; n < 100000; ++n) {
    const double share = simulate::pulse_share(speed * n * step, speed, step, 1.0, 0.08);
    within = within && share >= 0.0 && share <= 1.0;
    sum += share;
    if (n < 137) area += share * step;  // one turn and no more: the pulse rises once, at angle 1 rad
  }
  CHECK(within);
  CHECK(sum / 100000 == Approx(0.08).epsilon(1e-3));
  CHECK(area == Approx(0.08 / 7.3).epsilon(1e-9));
}
