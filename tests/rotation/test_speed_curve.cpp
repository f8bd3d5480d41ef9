#include <cmath>

#include "stillmass/numeric/random.hpp"
#include "stillmass/rotation/speed_curve.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

rotation::Pulses ideal_pulses(double f0, double s, int turns) {
  rotation::Pulses pulses;
  for (int i = 0; i <= turns; ++i) {
    const double turn = i;
    pulses.turns.push_back(turn);
    pulses.time_s.push_back(s == 0.0 ? turn / f0 : (-f0 + std::sqrt(f0 * f0 + 2.0 * s * turn)) / s);
  }
  pulses.time_u = 1e-5;
  return pulses;
}

}  // namespace

TEST_CASE("speed, angle and sweep rate of a linear run-up are those of the closed form") {
  const double f0 = 5.0;
  const double s = 1.5;
  const rotation::SpeedCurve curve(ideal_pulses(f0, s, 600));
  CHECK(curve.trend() == rotation::Trend::run_up);
  for (double t = 1.0; t < curve.time_s().hi - 1.0; t += 0.37) {
    CHECK(curve.speed_at(t) == Approx(f0 + s * t).epsilon(2e-3));  // slope of a cubic through turns of 2 to 6 % change
    CHECK(curve.turn_at(t) == Approx(f0 * t + 0.5 * s * t * t).margin(5e-4));
    REQUIRE(curve.sweep_rate(t));
    CHECK(*curve.sweep_rate(t) == Approx(s).epsilon(5e-3));
  }
  CHECK(curve.speed_range().lo == Approx(s / (-f0 + std::sqrt(f0 * f0 + 2.0 * s))));  // over the first turn
  CHECK(curve.speed_range().hi == Approx(std::sqrt(f0 * f0 + 2.0 * s * 600)).epsilon(1e-3));
}

TEST_CASE("a run within 2 percent is steady, a falling one a coast-down, an up and down one varying") {
  CHECK(rotation::SpeedCurve(ideal_pulses(25.0, 0.0, 100)).trend() == rotation::Trend::steady);
  CHECK(rotation::SpeedCurve(ideal_pulses(25.0, -1.0, 200)).trend() == rotation::Trend::coast_down);
  rotation::Pulses wave;
  double t = 0.0;
  for (int i = 0; i < 300; ++i) {
    wave.turns.push_back(i);
    wave.time_s.push_back(t);
    t += 1.0 / (25.0 + 5.0 * std::sin(0.05 * i));
  }
  CHECK(rotation::SpeedCurve(wave).trend() == rotation::Trend::varying);
}

TEST_CASE("the uncertainty of a mean speed is the scatter that jittered pulses really give") {
  const double u_t = 2e-5;
  const double f = 24.0;
  double square = 0.0;
  double stated = 0.0;
  constexpr int cases = 2000;
  for (int c = 0; c < cases; ++c) {
    const numeric::Random random(static_cast<std::uint64_t>(c) + 1);
    rotation::Pulses pulses = ideal_pulses(f, 0.0, 20);
    for (std::size_t i = 0; i < pulses.time_s.size(); ++i) pulses.time_s[i] += u_t * random.normal(i, 0);
    pulses.time_u = u_t;
    const auto speed = rotation::SpeedCurve(pulses).mean_speed(6.0, 10.0);
    square += (speed.value - f) * (speed.value - f);
    stated = *speed.u;
  }
  CHECK(std::sqrt(square / cases) == Approx(stated).epsilon(0.05));  // 2000 cases: 1.6 %
}

TEST_CASE("a missing pulse does not disturb the speed") {
  rotation::Pulses pulses = ideal_pulses(10.0, 1.0, 200);
  pulses.turns.erase(pulses.turns.begin() + 80);
  pulses.time_s.erase(pulses.time_s.begin() + 80);
  const rotation::SpeedCurve curve(pulses);
  const double t = curve.time_at(80.0);
  CHECK(t == Approx(-10.0 + std::sqrt(100.0 + 160.0)).margin(5e-5));
  CHECK(curve.speed_at(t) == Approx(10.0 + t).epsilon(2e-3));
}
