#include <vector>

#include "stillmass/modal/critical_speed.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

modal::Mode mode(double f, double z) {
  modal::Mode m;
  m.frequency = {f, 0.01 * f, 4.0, base::Quantity::frequency};
  m.damping_ratio = {z, {}, {}, base::Quantity::ratio};
  return m;
}

}  // namespace

TEST_CASE("an order meets a mode at its frequency over the order") {
  const std::vector<modal::Mode> modes{mode(24.0, 0.01), mode(60.0, 0.05)};
  const std::vector<double> orders{1.0, 2.0};
  const auto speeds = modal::critical_speeds(modes, orders, 50.0, base::Interval{20.0, 25.0});
  REQUIRE(speeds.size() == 3);  // 12, 24, 30; 60 turns per second is beyond
  CHECK(speeds[0].speed.value == 12.0);
  CHECK(*speeds[0].speed.u == Approx(0.12));
  CHECK(*speeds[0].margin == Approx(-0.4));
  CHECK(speeds[1].margin == 0.0);
  CHECK(speeds[1].amplification_factor == Approx(50.0));
  CHECK(speeds[2].mode == 1);
  CHECK(*speeds[2].margin == Approx(0.2));
}

TEST_CASE("R2: separation margins of the standard") {
  // API 617 7th edition (from memory): amplification factors 3.55, 5, 8, 10.
  const double factor[] = {3.55, 5.0, 8.0, 10.0};
  const double below[] = {8.7, 12.1, 14.4, 15.0};
  const double above[] = {18.7, 22.1, 24.4, 25.0};
  for (int i = 0; i < 4; ++i) {
    CHECK(100.0 * modal::required_margin(factor[i]).below == Approx(below[i]).margin(0.06));
    CHECK(100.0 * modal::required_margin(factor[i]).above == Approx(above[i]).margin(0.06));
  }
  CHECK(modal::required_margin(2.4).above == 0.0);
}

TEST_CASE("D10: the limit of a linear sweep, and the warning beyond it") {
  // ISO 7626-2 (from memory): 54 f^2 / Q^2 Hz per minute. f = 25 Hz, Q = 50: 13.5 Hz/min.
  CHECK(60.0 * modal::sweep_rate_limit(25.0, 0.01) == Approx(13.5));
  CHECK(!modal::sweep_check(mode(25.0, 0.01), -0.2));
  const auto finding = modal::sweep_check(mode(25.0, 0.01), -0.3);
  REQUIRE(finding);
  CHECK(finding->code == base::Code::sweep_too_fast);
}

TEST_CASE("R1: the amplification factor is the critical speed over its half-power width") {
  CHECK(modal::amplification_factor(3000.0, 2900.0, 3200.0) == Approx(10.0));
}
