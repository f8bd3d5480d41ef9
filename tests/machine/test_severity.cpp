#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/machine/severity.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using machine::MachineKind;
using machine::Support;
using machine::Zone;

namespace {

machine::Machine machine_of(MachineKind kind, double power_kw, double rpm, std::optional<Support> support) {
  machine::Machine out;
  out.kind = kind;
  out.power_w = power_kw * 1000.0;
  out.speed_hz = base::Interval{rpm / 60.0, rpm / 60.0};
  out.foundation = support;
  return out;
}

machine::SeverityQuestion housing(std::string standard = {}, std::string category = {}) {
  machine::SeverityQuestion out;
  out.standard = std::move(standard);
  out.category = std::move(category);
  out.direction = "horizontal";
  out.on_bearing_housing = true;
  return out;
}

void check_limits(const base::Answer<machine::SeverityLimits>& limits, double ab, double bc, double cd) {
  REQUIRE(limits);
  CHECK(limits->velocity[0] * 1000.0 == Approx(ab));
  CHECK(limits->velocity[1] * 1000.0 == Approx(bc));
  CHECK(limits->velocity[2] * 1000.0 == Approx(cd));
}

}  // namespace

TEST_CASE("part 3 gives the limits of the machine's size and support (ISO 10816-3:1998, from memory, CHECKS 4a)") {
  const auto limits = [](double kw, Support support) {
    return machine::severity_limits(machine_of(MachineKind::fan, kw, 1480, support), housing());
  };
  check_limits(limits(500, Support::rigid), 2.3, 4.5, 7.1);
  check_limits(limits(500, Support::flexible), 3.5, 7.1, 11.0);
  check_limits(limits(55, Support::rigid), 1.4, 2.8, 4.5);
  check_limits(limits(55, Support::flexible), 2.3, 4.5, 7.1);
  check_limits(limits(300, Support::rigid), 1.4, 2.8, 4.5);  // "above 300 kW" is group 1
  CHECK(limits(300, Support::rigid)->category == "group 2");
}

TEST_CASE("every line of ISO 10816-3:1998 stands in the table (from memory, CHECKS 4a)") {
  struct Line {
    const char* category;
    Support support;
    double mm_s[3];
    double um[3];
  };
  const Line line = GENERATE(Line{"group 1", Support::rigid, {2.3, 4.5, 7.1}, {29, 57, 90}},
                             Line{"group 1", Support::flexible, {3.5, 7.1, 11.0}, {45, 90, 140}},
                             Line{"group 2", Support::rigid, {1.4, 2.8, 4.5}, {22, 45, 71}},
                             Line{"group 2", Support::flexible, {2.3, 4.5, 7.1}, {37, 71, 113}},
                             Line{"group 3", Support::rigid, {2.3, 4.5, 7.1}, {18, 36, 56}},
                             Line{"group 3", Support::flexible, {3.5, 7.1, 11.0}, {28, 56, 90}},
                             Line{"group 4", Support::rigid, {1.4, 2.8, 4.5}, {11, 22, 36}},
                             Line{"group 4", Support::flexible, {2.3, 4.5, 7.1}, {18, 36, 56}});
  const bool pump = line.category[6] > '2';
  const double kw = line.category[6] == '1' ? 500 : 55;
  const auto machine = machine_of(pump ? MachineKind::pump : MachineKind::fan, kw, 1480, line.support);
  const auto limits = machine::severity_limits(machine, housing("ISO 10816-3", line.category));
  check_limits(limits, line.mm_s[0], line.mm_s[1], line.mm_s[2]);
  REQUIRE(limits->displacement);
  for (int i = 0; i < 3; ++i) CHECK((*limits->displacement)[i] * 1e6 == Approx(line.um[i]));
  CHECK(limits->source.find("from memory") != std::string::npos);
  CHECK_FALSE(limits->displacement_pp);
  CHECK((limits->note.find("2009") != std::string::npos) == pump);  // pumps were handed to part 7
}

TEST_CASE("part 3 begins above 15 kW, and asks a pump for its driver") {
  CHECK_FALSE(machine::severity_limits(machine_of(MachineKind::fan, 15, 1480, Support::rigid), housing()));
  CHECK(machine::severity_limits(machine_of(MachineKind::fan, 15.1, 1480, Support::rigid), housing()));
  const auto pump =
      machine::severity_limits(machine_of(MachineKind::pump, 55, 1480, Support::rigid), housing("ISO 10816-3"));
  REQUIRE_FALSE(pump);
  CHECK(pump.refusal().measure.find("group 3") != std::string::npos);
}

TEST_CASE("a pump below 600 r/min is limited in displacement too (S4, from memory, low confidence)") {
  const auto limits = [](double rpm, const char* category) {
    return machine::severity_limits(machine_of(MachineKind::pump, GENERATE(30.0, 250.0), rpm, Support::flexible),
                                    housing({}, category));
  };
  const auto one = limits(590, "I");
  REQUIRE(one->displacement_pp);
  CHECK((*one->displacement_pp)[0] * 1e6 == Approx(50));
  CHECK((*one->displacement_pp)[1] * 1e6 == Approx(80));
  CHECK((*one->displacement_pp)[2] * 1e6 == Approx(130));
  CHECK(one->displacement_pp_source.find("from memory, low confidence") != std::string::npos);
  const auto two = limits(590, "II");
  CHECK((*two->displacement_pp)[0] * 1e6 == Approx(65));
  CHECK((*two->displacement_pp)[1] * 1e6 == Approx(100));
  CHECK((*two->displacement_pp)[2] * 1e6 == Approx(160));
  CHECK_FALSE(limits(600, "I")->displacement_pp);
}

TEST_CASE("ISO 20816-1 gives ranges, so there are no limits to be had from it") {
  const auto answer =
      machine::severity_limits(machine_of(MachineKind::fan, 55, 1480, Support::rigid), housing("ISO 20816-1"));
  REQUIRE_FALSE(answer);
  CHECK(answer.refusal().seen.find("ranges") != std::string::npos);
}

TEST_CASE("a motor's shaft height decides in place of its power") {
  auto motor = machine_of(MachineKind::motor, 200, 1480, Support::rigid);
  motor.shaft_height_m = 0.355;
  CHECK(machine::severity_limits(motor, housing())->category == "group 1");
  motor.shaft_height_m = 0.280;
  CHECK(machine::severity_limits(motor, housing())->category == "group 2");
  motor.shaft_height_m = 0.132;  // below 160 mm part 3 has nothing, whatever the power
  CHECK(machine::severity_limits(motor, housing()).refusal().seen.find("132 mm") != std::string::npos);
}

TEST_CASE("the limits of displacement and velocity of part 3 meet at 12.5, 10 and 20 Hz (CHECKS 4a)") {
  for (const auto& row : machine::severity_table()) {
    if (row.standard != "ISO 10816-3") continue;
    const double expected = row.category == "group 1" ? 12.5 : row.category == "group 2" ? 10.0 : 20.0;
    REQUIRE(row.displacement_limits);
    for (std::size_t i = 0; i < 3; ++i) {
      const double corner = row.velocity_limits[i] / (2.0 * std::numbers::pi * (*row.displacement_limits)[i]);
      CHECK(corner == Approx(expected).epsilon(0.03));  // the tables are rounded to two digits
    }
  }
}

TEST_CASE("part 7 gives the limits of pumps by category and power (S1 to S3)") {
  const auto limits = [](double kw, const char* category) {
    return machine::severity_limits(machine_of(MachineKind::pump, kw, 2950, Support::flexible), housing({}, category));
  };
  check_limits(limits(30, "I"), 2.5, 4.0, 6.6);
  check_limits(limits(250, "category I"), 3.5, 5.0, 7.6);
  check_limits(limits(30, "Category II"), 3.2, 5.1, 8.5);
  check_limits(limits(250, "II"), 4.2, 6.1, 9.5);
}

TEST_CASE("part 1 gives the limits of its classes (S5)") {
  const auto limits = [](double kw, Support support) {
    return machine::severity_limits(machine_of(MachineKind::general, kw, 1480, support), housing("ISO 10816-1"));
  };
  check_limits(limits(5, Support::rigid), 0.71, 1.8, 4.5);
  check_limits(limits(50, Support::flexible), 1.12, 2.8, 7.1);
  check_limits(limits(500, Support::rigid), 1.8, 4.5, 11.2);
  check_limits(limits(500, Support::flexible), 2.8, 7.1, 18.0);
}

TEST_CASE("the band begins at 10 Hz, and at 2 Hz for 600 r/min and slower") {
  const auto band = [](double rpm) {
    return machine::severity_limits(machine_of(MachineKind::fan, 55, rpm, Support::rigid), housing())->band_hz;
  };
  CHECK(band(1480) == base::Interval{10.0, 1000.0});
  CHECK(band(590) == base::Interval{2.0, 1000.0});
}

TEST_CASE("zones are refused where the standard does not hold, with what is missing") {
  const auto seen = [](const machine::Machine& of, const machine::SeverityQuestion& question) {
    const auto answer = machine::severity_limits(of, question);
    REQUIRE_FALSE(answer);
    CHECK(answer.refusal().code == "limit-unknown");
    CHECK_FALSE(answer.refusal().measure.empty());
    return answer.refusal().seen;
  };
  auto fan = machine_of(MachineKind::fan, 55, 1480, Support::rigid);
  auto structure = housing();
  structure.on_bearing_housing = false;
  CHECK(seen(fan, structure).find("bearing housing") != std::string::npos);
  fan.foundation.reset();
  CHECK(seen(fan, housing()).find("support class") != std::string::npos);
  CHECK(seen(machine_of(MachineKind::pump, 30, 1480, Support::rigid), housing()).find("category") != std::string::npos);
  CHECK(seen(machine_of(MachineKind::fan, 4, 1480, Support::rigid), housing()).find("4 kW") != std::string::npos);
  auto nameless = machine_of(MachineKind::fan, 55, 1480, Support::rigid);
  nameless.power_w.reset();
  CHECK(seen(nameless, housing()).find("power") != std::string::npos);
}

TEST_CASE("a standard or category that is not there is the caller's error") {
  const auto fan = machine_of(MachineKind::fan, 55, 1480, Support::rigid);
  CHECK_THROWS_AS(machine::severity_limits(fan, housing("ISO 9999")), base::Error);
  CHECK_THROWS_AS(machine::severity_limits(fan, housing("ISO 10816-3", "group 9")), base::Error);
}

TEST_CASE("a direction can have a support class of its own, declared or measured") {
  auto fan = machine_of(MachineKind::fan, 55, 1480, Support::rigid);
  fan.foundation_by_direction.push_back({"horizontal", Support::flexible});
  check_limits(machine::severity_limits(fan, housing()), 2.3, 4.5, 7.1);
  auto measured = housing();
  measured.support = machine::support_class(31.0, 24.7);  // 1.255 times: rigid
  check_limits(machine::severity_limits(fan, measured), 1.4, 2.8, 4.5);
  CHECK(machine::support_class(30.0, 24.7) == Support::flexible);
}

TEST_CASE("a measured support class is refused where 1.25 lies within its uncertainty") {
  const auto of = [](double natural, std::optional<double> u) {
    base::Estimate lowest;
    lowest.value = natural;
    lowest.u = u;
    base::Estimate forcing;
    forcing.value = 24.0;
    forcing.u = 0.01;
    return machine::support_class(lowest, forcing);
  };
  CHECK(*of(31.0, 0.2) == Support::rigid);     // 1.292 +- 0.017
  CHECK(*of(29.0, 0.2) == Support::flexible);  // 1.208 +- 0.017
  CHECK(of(30.3, 0.2).refusal().code == "support-unknown");
  CHECK(of(29.6, 0.25).refusal().code == "support-unknown");
  CHECK_FALSE(of(31.0, {}));  // 3 % away, no uncertainty given
  CHECK(*of(32.0, {}) == Support::rigid);
}

TEST_CASE("a value on a boundary belongs to the better zone, and the worse of two quantities counts") {
  const auto limits = machine::severity_limits(machine_of(MachineKind::fan, 55, 1480, Support::rigid), housing());
  REQUIRE(limits);
  CHECK(machine::zone(*limits, 0.5e-3) == Zone::a);
  CHECK(machine::zone(*limits, limits->velocity[0]) == Zone::a);
  CHECK(machine::zone(*limits, 2.0e-3) == Zone::b);
  CHECK(machine::zone(*limits, 4.0e-3) == Zone::c);
  CHECK(machine::zone(*limits, 9.0e-3) == Zone::d);
  CHECK(machine::zone(*limits, 0.5e-3, 50e-6) == Zone::c);
  CHECK(machine::name(Zone::d) == "D");
}
