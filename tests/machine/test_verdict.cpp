#include "stillmass/machine/verdict.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using machine::PlantState;
using machine::SeverityLevels;
using machine::SeverityLimits;
using machine::Zone;

namespace {

// Group 2, rigid (ISO 10816-3:1998, CHECKS 4a).
SeverityLimits group_two_rigid() {
  SeverityLimits out;
  out.standard = "ISO 10816-3";
  out.category = "group 2";
  out.velocity = {1.4e-3, 2.8e-3, 4.5e-3};
  out.displacement = {{22e-6, 45e-6, 71e-6}};
  return out;
}

base::Estimate level(double value, std::optional<double> u = {}, std::optional<double> dof = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.dof = dof;
  return out;
}

SeverityLevels of(base::Estimate velocity, std::optional<base::Estimate> displacement = {}) {
  SeverityLevels out;
  out.velocity = velocity;
  out.displacement = displacement;
  out.held_hz = {10.0, 1000.0};
  return out;
}

}  // namespace

TEST_CASE("a level on a boundary has the better zone, and a hair more the worse") {
  const double limits[] = {1.4e-3, 2.8e-3, 4.5e-3};
  for (std::size_t i = 0; i < 3; ++i) {
    CHECK(machine::judge(group_two_rigid(), of(level(limits[i])))->zone == static_cast<Zone>(i));
    CHECK(machine::judge(group_two_rigid(), of(level(1.0001 * limits[i])))->zone == static_cast<Zone>(i + 1));
  }
}

TEST_CASE("the worse of velocity and displacement gives the zone, and says which") {
  const auto verdict = machine::judge(group_two_rigid(), of(level(0.5e-3), level(50e-6)));
  REQUIRE(verdict);
  CHECK(verdict->zone == Zone::c);
  CHECK(verdict->levels[verdict->rules].judged == machine::Judged::displacement);
  CHECK(verdict->share == Approx(50.0 / 71.0));
  const auto velocity = machine::judge(group_two_rigid(), of(level(4.0e-3), level(50e-6)));
  CHECK(velocity->rules == 0);  // zone C both: 0.89 of C/D against 0.70
}

TEST_CASE("a level whose 2 u reach across a boundary could be either zone") {
  const auto verdict = machine::judge(group_two_rigid(), of(level(2.7e-3, 0.06e-3)));
  REQUIRE(verdict);
  CHECK(verdict->zone == Zone::b);
  CHECK(verdict->could_be == std::vector<Zone>{Zone::b, Zone::c});
  CHECK(machine::text(*verdict) == "zone B or C");
  CHECK(verdict->has_uncertainty);
  const auto sure = machine::judge(group_two_rigid(), of(level(2.7e-3, 0.04e-3)));
  CHECK(sure->could_be == std::vector<Zone>{Zone::b});
  CHECK(machine::text(*sure) == "zone B");
  // Three blocks: Student's t for 2 degrees of freedom is 4.303 (table), 2.2 times 1.96.
  const auto few = machine::judge(group_two_rigid(), of(level(2.7e-3, 0.04e-3, 2.0)));
  CHECK(few->could_be == std::vector<Zone>{Zone::b, Zone::c});
  CHECK_FALSE(machine::judge(group_two_rigid(), of(level(2.7e-3)))->has_uncertainty);
  const auto wide = machine::judge(group_two_rigid(), of(level(2.7e-3, 1.0e-3)));
  CHECK(machine::text(*wide) == "zone A, B, C or D");
}

TEST_CASE("no zone where recording or unit does not allow one") {
  const auto seen = [](const SeverityLimits& limits, const SeverityLevels& levels) {
    const auto answer = machine::judge(limits, levels);
    REQUIRE_FALSE(answer);
    CHECK(answer.refusal().code == "limit-unknown");
    CHECK_FALSE(answer.refusal().measure.empty());
    return answer.refusal().seen;
  };
  auto levels = of(level(2e-3), level(20e-6));
  levels.usable = false;
  CHECK(seen(group_two_rigid(), levels).find("unusable") != std::string::npos);
  levels = of(level(2e-3), level(20e-6));
  levels.unit_known = false;
  CHECK(seen(group_two_rigid(), levels).find("assumed") != std::string::npos);
  levels = of(level(2e-3), level(20e-6));
  levels.held_hz = {10.0, 399.0};
  CHECK(seen(group_two_rigid(), levels).find("399 Hz") != std::string::npos);
  levels.held_hz = {11.2, 1000.0};
  CHECK(seen(group_two_rigid(), levels).find("11.2") != std::string::npos);
  levels.held_hz = {10.9, 400.0};
  CHECK(machine::judge(group_two_rigid(), levels));
  auto slow = group_two_rigid();
  slow.band_hz = {2.0, 1000.0};
  levels = of(level(2e-3));
  levels.held_hz = {2.0, 1000.0};
  CHECK(seen(slow, levels).find("displacement") != std::string::npos);
}

TEST_CASE("displacement peak-to-peak of a slow pump is judged beside its velocity") {
  SeverityLimits pump;
  pump.standard = "ISO 10816-7";
  pump.velocity = {2.5e-3, 4.0e-3, 6.6e-3};
  pump.displacement_pp = {{50e-6, 80e-6, 130e-6}};
  pump.band_hz = {2.0, 1000.0};
  auto levels = of(level(1e-3));
  levels.held_hz = {2.0, 1000.0};
  CHECK_FALSE(machine::judge(pump, levels));
  levels.displacement_pp = level(100e-6, 5e-6);
  const auto verdict = machine::judge(pump, levels);
  REQUIRE(verdict);
  CHECK(verdict->zone == Zone::c);
  CHECK(verdict->levels[verdict->rules].judged == machine::Judged::displacement_pp);
}

TEST_CASE("the typical ranges are those quoted (S6, from memory), and decide no zone inside") {
  const auto ranges = machine::typical_ranges();
  CHECK(ranges.standard == "ISO 20816-1");
  CHECK(ranges.boundary[0].lo * 1e3 == Approx(0.71));
  CHECK(ranges.boundary[0].hi * 1e3 == Approx(4.5));
  CHECK(ranges.boundary[1].lo * 1e3 == Approx(1.8));
  CHECK(ranges.boundary[1].hi * 1e3 == Approx(9.3));
  CHECK(ranges.boundary[2].lo * 1e3 == Approx(4.5));
  CHECK(ranges.boundary[2].hi * 1e3 == Approx(14.7));
  CHECK(ranges.source.find("from memory") != std::string::npos);
  const auto at = [&](double mm_s, std::optional<double> u = {}) {
    return machine::against_ranges(ranges, level(mm_s * 1e-3, u));
  };
  CHECK(at(0.5).text == "below the range of A/B");
  CHECK(at(1.0).text == "within the range of A/B: zone A to B, not decided");
  CHECK(at(3.0).text == "within the range of A/B and B/C: zone A to C, not decided");
  CHECK(at(6.0).text == "within the range of B/C and C/D: zone B to D, not decided");
  CHECK(at(12.0).text == "within the range of C/D: zone C to D, not decided");
  CHECK(at(15.0).text == "above the range of C/D");
  CHECK(at(3.0).place == std::array{machine::Place::within, machine::Place::within, machine::Place::below});
  CHECK(at(0.5, 0.2e-3).worst == Zone::b);
}

TEST_CASE("the plant's own limits are judged beside the standard") {
  machine::PlantLimits limits;
  CHECK_FALSE(machine::against_plant(limits, level(3e-3)));
  limits.target = 2.8e-3;
  limits.alarm = 4.5e-3;
  limits.trip = 7.1e-3;
  const auto state = [&](double mm_s) { return machine::against_plant(limits, level(mm_s * 1e-3))->state; };
  CHECK(state(2.8) == PlantState::within);
  CHECK(state(2.9) == PlantState::above_target);
  CHECK(state(4.6) == PlantState::above_alarm);
  CHECK(state(7.2) == PlantState::above_trip);
  const auto close = machine::against_plant(limits, level(4.4e-3, 0.1e-3));
  CHECK(close->could_be == std::vector<PlantState>{PlantState::above_target, PlantState::above_alarm});
  CHECK(*close->over == Approx(4.4 / 2.8));
  limits.alarm.reset();
  const auto skips = machine::against_plant(limits, level(7.0e-3, 0.1e-3));
  CHECK(skips->could_be == std::vector<PlantState>{PlantState::above_target, PlantState::above_trip});
  CHECK(machine::name(PlantState::above_alarm) == "above alarm");
}

TEST_CASE("the worst point is that of the worst zone, then of the greatest share of its own limit") {
  const auto judged = [](double mm_s) { return *machine::judge(group_two_rigid(), of(level(mm_s * 1e-3))); };
  auto flexible = group_two_rigid();
  flexible.velocity = {2.3e-3, 4.5e-3, 7.1e-3};
  const auto big_but_allowed = *machine::judge(flexible, of(level(4.4e-3)));  // zone B
  const std::vector<machine::SeverityVerdict> points = {judged(1.0), big_but_allowed, judged(3.0), judged(2.9)};
  CHECK(machine::worst_point(points) == std::size_t{2});
  CHECK_FALSE(machine::worst_point({}));
}
