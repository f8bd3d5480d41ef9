#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/rotation/sweep.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

constexpr double pi = std::numbers::pi;

// Highest response |x| k / F of m x'' + c x' + k x = F sin(phase) with d(phase)/dt = 2 pi (f0 + s t), by the slowly
// varying complex envelope integrated with the exact decay of each step: an independent simulation.
double swept_peak(double fn, double zeta, double s, double from_hz, double to_hz) {
  const double w = 2.0 * pi * fn;
  const double step = 1.0 / (400.0 * fn);
  double x = 0.0;
  double v = 0.0;
  double highest = 0.0;
  const auto force = [&](double t) { return std::sin(2.0 * pi * (from_hz * t + 0.5 * s * t * t)); };
  const auto slope = [&](double t, double y, double u) { return w * w * (force(t) - y) - 2.0 * zeta * w * u; };
  const double end = (to_hz - from_hz) / s;
  for (double t = 0.0; t < end; t += step) {  // classical Runge-Kutta of the fourth order
    const double k1 = slope(t, x, v);
    const double k2 = slope(t + step / 2, x + step / 2 * v, v + step / 2 * k1);
    const double k3 = slope(t + step / 2, x + step / 2 * v + step * step / 4 * k1, v + step / 2 * k2);
    const double k4 = slope(t + step, x + step * v + step * step / 2 * k2, v + step * k3);
    x += step * (v + step / 6 * (k1 + k2 + k3));
    v += step / 6 * (k1 + 2 * k2 + 2 * k3 + k4);
    highest = std::max(highest, std::hypot(x, v / (2.0 * pi * (from_hz + s * t))));
  }
  return highest;
}

}  // namespace

TEST_CASE("the swept peak follows Cronin's formula within its stated error (R5)") {
  // CHECKS R5: fit .993 .943 .786 .642 .394 at eta .3 1 4 10 50; stated error .017.
  const double eta = GENERATE(0.3, 1.0, 4.0, 10.0, 50.0);
  const double fn = 20.0;
  const double zeta = 0.01;
  const double bandwidth = 2.0 * zeta * fn;
  const double s = eta * bandwidth * bandwidth;
  CHECK(rotation::sweep_parameter(fn, zeta, s) == Approx(eta));
  const double steady = 1.0 / (2.0 * zeta);
  const double simulated = swept_peak(fn, zeta, s, 10.0, 32.0) / steady;
  INFO("simulated " << simulated << ", formula " << rotation::swept_peak_fraction(eta));
  CHECK(std::abs(simulated - rotation::swept_peak_fraction(eta)) < 0.017);
}

TEST_CASE("the published values of Cronin's formula (R5)") {
  CHECK(rotation::swept_peak_fraction(0.3) == Approx(0.993).margin(0.001));
  CHECK(rotation::swept_peak_fraction(1.0) == Approx(0.943).margin(0.001));
  CHECK(rotation::swept_peak_fraction(4.0) == Approx(0.786).margin(0.001));
  CHECK(rotation::swept_peak_fraction(10.0) == Approx(0.642).margin(0.001));
  CHECK(rotation::swept_peak_fraction(50.0) == Approx(0.394).margin(0.001));
  CHECK(rotation::swept_peak_fraction(0.0) == 1.0);
}

TEST_CASE("an undamped mode swept through reaches 3.67 f / sqrt S (R4)") {
  CHECK(rotation::undamped_passage(50.0, 1.0) == Approx(183.5));
  // Simulated: fn = 20, S = 1; the constant is good to 1 %.
  CHECK(swept_peak(20.0, 0.0, 1.0, 10.0, 24.0) == Approx(rotation::undamped_passage(20.0, 1.0)).epsilon(0.01));
}

TEST_CASE("the limit of the sweep rate is 54 f^2 / Q^2 Hz a minute (D10) and loses 5 percent by Cronin's formula") {
  CHECK(rotation::sweep_rate_limit(30.0, 0.01) * 60.0 == Approx(54.0 * 900.0 / 2500.0));
  const double eta = rotation::sweep_parameter(30.0, 0.01, rotation::sweep_rate_limit(30.0, 0.01));
  CHECK(1.0 - rotation::swept_peak_fraction(eta) == Approx(0.050).margin(0.001));
}
