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

TEST_CASE("the 6203 geometry gives the published ratios") {
  // Case Western Reserve University bearing data notes: 4.9469 3.0530 .3817 3.9874 (from memory).
  const auto orders = machine::bearing_orders(*machine::bearing_named("6203"));
  CHECK(orders.inner == Approx(4.9469).epsilon(2e-4));
  CHECK(orders.outer == Approx(3.0530).epsilon(2e-4));
  CHECK(orders.cage == Approx(0.3817).epsilon(2e-4));
  CHECK(orders.element == Approx(3.9874).epsilon(2e-4));
}

TEST_CASE("nine balls of 7.9375 mm on 38.50 mm give the ratios published with a data set of seeded faults") {
  // Forbes, Curtin University, notes of a data set of 21/11/2012: .3969, 3.572, 5.428, spin 2.32. Read.
  const auto orders = machine::bearing_orders({"x", 9, 0.0079375, 0.0385, 0.0, ""});
  CHECK(orders.cage == Approx(0.3969).epsilon(2e-4));
  CHECK(orders.outer == Approx(3.572).epsilon(2e-4));
  CHECK(orders.inner == Approx(5.428).epsilon(2e-4));
  CHECK(orders.spin == Approx(2.32).epsilon(2e-3));
}

TEST_CASE("a slip of the pen in a bearing's size finds the nearest") {
  CHECK(machine::nearest_bearing("6025") == "6205");
  CHECK(machine::nearest_bearing("thrust").empty());
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
