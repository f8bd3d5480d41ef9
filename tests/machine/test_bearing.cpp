#include "stillmass/base/error.hpp"
#include "stillmass/machine/bearing.hpp"

#include "support/catch.hpp"

using namespace stillmass;

TEST_CASE("the 6205 geometry gives the published ratios (F1)") {
  // Case Western Reserve University bearing data notes: 5.4152 3.5848 .39828 4.7135; CHECKS F1, tolerance 2e-4
  // relative.
  const auto bearing = machine::bearing_named("6205");
  REQUIRE(bearing);
  const auto orders = machine::bearing_orders(*bearing);
  CHECK(orders.inner == Approx(5.4152).epsilon(2e-4));
  CHECK(orders.outer == Approx(3.5848).epsilon(2e-4));
  CHECK(orders.cage == Approx(0.39828).epsilon(2e-4));
  CHECK(orders.element == Approx(4.7135).epsilon(2e-4));
  CHECK(orders.spin == Approx(0.5 * orders.element));
}

TEST_CASE("inner and outer passes add up to the elements, and the cage carries the outer pass (F4)") {
  machine::Bearing bearing;
  bearing.elements = GENERATE(7, 12, 17);
  bearing.ball_diameter_m = 0.012;
  bearing.pitch_diameter_m = 0.060;
  bearing.contact_angle_rad = GENERATE(0.0, 0.26, 0.70);
  const auto orders = machine::bearing_orders(bearing);
  CHECK(orders.inner + orders.outer == Approx(bearing.elements));
  CHECK(orders.cage == Approx(orders.outer / bearing.elements));
  CHECK(orders.cage + orders.inner / bearing.elements == Approx(1.0));
}

TEST_CASE("a geometry that cannot be is the caller's error") {
  machine::Bearing bearing{"x", 9, 0.04, 0.03, 0.0, ""};
  CHECK_THROWS_AS(machine::bearing_orders(bearing), base::Error);
  bearing = {"x", 2, 0.01, 0.03, 0.0, ""};
  CHECK_THROWS_AS(machine::bearing_orders(bearing), base::Error);
  CHECK_FALSE(machine::bearing_named("no such size"));
}
