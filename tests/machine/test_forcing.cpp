#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/machine/bearing.hpp"
#include "stillmass/machine/forcing.hpp"

#include "machine/machines.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using machine::Forcing;
using machine::Machine;
using std::numbers::pi;
using tests::hertz;
using tests::two_pole_pump;

namespace {

const Forcing& named(const std::vector<Forcing>& list, const std::string& name) {
  const auto at = std::find_if(list.begin(), list.end(), [&](const Forcing& each) { return each.name == name; });
  REQUIRE(at != list.end());
  return *at;
}

}  // namespace

TEST_CASE("pole pass of the two-pole motor at 3502 r/min is 3.2667 Hz (F5)") {
  // Fitzgerald, Kingsley, Umans, Electric Machinery, Ex. 6.1: slip .02722; slip speed 1.6333 Hz, two poles.
  Machine motor;
  motor.line_frequency_hz = 60.0;
  motor.motor_poles = 2;
  const auto list = machine::forcing_frequencies(motor, hertz(3502.0 / 60.0, 0.005));
  CHECK(named(list, "1x + pole pass").frequency.value - named(list, "1x").frequency.value ==
        Approx(3.2667).epsilon(2e-3));
  CHECK(named(list, "1x").frequency.value - named(list, "1x - pole pass").frequency.value ==
        Approx(3.2667).epsilon(2e-3));
  CHECK(named(list, "twice line frequency").frequency.value == 120.0);
}

TEST_CASE("vane pass of 7 vanes at 1780 r/min is 207.67 Hz (F6) and stands in place of 7x") {
  Machine pump;
  pump.vanes = 7;
  const auto list = machine::forcing_frequencies(pump, hertz(1780.0 / 60.0, 0.01), 8);
  const Forcing& vane_pass = named(list, "vane pass (7x)");
  CHECK(vane_pass.frequency.value == Approx(207.67).epsilon(1e-4));
  CHECK(*vane_pass.frequency.u == Approx(0.07));
  CHECK(std::none_of(list.begin(), list.end(), [](const Forcing& each) { return each.name == "7x"; }));
  CHECK(std::is_sorted(list.begin(), list.end(),
                       [](const Forcing& a, const Forcing& b) { return a.frequency.value < b.frequency.value; }));
}

TEST_CASE("bearings and gears turn with their shaft") {
  Machine machine;
  machine.shafts = {{"output", 0.25, 80}, {"input", 1.0, 20}};
  auto bearing = *machine::bearing_named("6205");
  bearing.shaft = "output";
  machine.bearings = {bearing};
  const auto list = machine::forcing_frequencies(machine, hertz(40.0, 0.01));
  CHECK(named(list, "1x of output").frequency.value == Approx(10.0));
  CHECK(named(list, "outer ring of bearing 6205").frequency.value == Approx(35.848).epsilon(2e-4));
  CHECK(named(list, "gear mesh of output").frequency.value == Approx(800.0));
  // Both wheels have the one mesh, with two harmonics and side bands at the speeds of both shafts.
  CHECK(std::count_if(list.begin(), list.end(),
                      [](const Forcing& each) { return each.kind == machine::ForcingKind::gear_mesh; }) == 7);
  CHECK(named(list, "2x gear mesh of output").frequency.value == Approx(1600.0));
  CHECK(named(list, "2x gear mesh of output").of == "gear mesh of output");
  CHECK(named(list, "gear mesh of output - 1x of output").frequency.value == Approx(790.0));
  CHECK(named(list, "gear mesh of output + 1x").frequency.value == Approx(840.0));
  const Forcing& twice = named(list, "2x outer ring of bearing 6205");
  CHECK(twice.harmonic == 2);
  CHECK(twice.of == "outer ring of bearing 6205");
  CHECK(twice.shaft == "output");
  CHECK(*twice.frequency.u == Approx(0.01 * twice.frequency.value).epsilon(0.01));  // slip: 1 %, common practice
}

TEST_CASE("on a drive the electrical frequency follows the speed") {
  Machine machine = two_pole_pump();
  machine.supply = machine::Supply::drive;
  const auto list = machine::forcing_frequencies(machine, hertz(30.0, 0.01));
  const Forcing& electrical = named(list, "twice drive frequency");
  CHECK(electrical.frequency.value == Approx(60.9));
  CHECK(electrical.kind == machine::ForcingKind::electrical);
  CHECK(std::none_of(list.begin(), list.end(), [](const Forcing& each) {
    return each.kind == machine::ForcingKind::pole_pass || each.frequency.value == 100.0;
  }));
  CHECK(electrical.frequency.value - 3.0 * *electrical.frequency.u < 60.0);
}

TEST_CASE("a four-pole motor on 50 Hz at 1478 r/min, worked by hand") {
  // Synchronous 2 x 50 / 4 = 25 Hz; speed 24.6333 Hz; slip (25 - 24.6333) / 25 = 0.014667 (definition of slip:
  // Fitzgerald, Kingsley, Umans, Electric Machinery, ch. 6); slip frequency s f = 0.73333 Hz; pole pass = poles times
  // slip speed = 4 x 0.36667 = 1.46667 Hz = 2 s f.
  Machine motor;
  motor.line_frequency_hz = 50.0;
  motor.motor_poles = 4;
  motor.rotor_bars = 40;
  const auto list = machine::forcing_frequencies(motor, hertz(1478.0 / 60.0, 0.002));
  CHECK(*motor.synchronous_hz() == 25.0);
  const auto is = [&](const char* name, double frequency) {
    CHECK(named(list, name).frequency.value == Approx(frequency).margin(1e-3));
  };
  is("1x", 24.6333);
  is("1x - pole pass", 23.1667);
  is("1x + pole pass", 26.1);
  is("1x - slip", 23.9);
  is("1x + slip", 25.3667);
  is("line frequency", 50.0);
  is("twice line frequency", 100.0);
  is("four times line frequency", 200.0);
  is("twice line frequency + pole pass", 101.4667);
  is("4x", 98.5333);  // and this is twice line frequency - pole pass, by definition: it stands once
  CHECK(std::none_of(list.begin(), list.end(),
                     [](const Forcing& each) { return each.name == "twice line frequency - pole pass"; }));
  is("rotor bars (40x)", 985.3333);
  is("rotor bars (40x) - twice line frequency", 885.3333);
  is("rotor bars (40x) + twice line frequency", 1085.3333);
  // u: (1 - 4) u of the speed below 1x, (1 + 4) above; twice 0.02 Hz of the line.
  CHECK(*named(list, "1x + pole pass").frequency.u == Approx(std::hypot(3 * 0.002, 0.04)));
  CHECK(*named(list, "1x - pole pass").frequency.u == Approx(std::hypot(5 * 0.002, 0.04)));
}

TEST_CASE("a frequency says what it is a harmonic or a side band of") {
  Machine motor = two_pole_pump();
  const auto list = machine::forcing_frequencies(motor, hertz(49.4, 0.01));
  const Forcing& four = named(list, "four times line frequency");
  CHECK(four.of == "twice line frequency");
  CHECK(four.harmonic == 2);
  const Forcing& band = named(list, "1x - pole pass");
  CHECK(band.of == "1x");
  CHECK(band.side_band == -1);
  CHECK(named(list, "2x").of == "1x");
  CHECK(named(list, "1x").of.empty());
  CHECK(named(list, "twice vane pass (12x)").of == "vane pass (6x)");
  CHECK(named(list, "1.5x").rank == 2);
  CHECK(named(list, "line frequency").kind == machine::ForcingKind::line);
  CHECK(std::none_of(list.begin(), list.end(), [](const Forcing& each) { return each.name == "1x + slip"; }));
}

TEST_CASE("the length of a belt is that of the exact geometry") {
  // Open belt: 2 C cos a + pi/2 (D + d) + a (D - d), sin a = (D - d) / 2C.
  const double large = 0.2;
  const double small = 0.125;
  const double centre = GENERATE(0.3, 0.5, 1.2);
  const double a = std::asin((large - small) / (2.0 * centre));
  const double exact = 2.0 * centre * std::cos(a) + 0.5 * pi * (large + small) + a * (large - small);
  CHECK(machine::belt_length(large, small, centre) == Approx(exact).epsilon(1e-4));
  CHECK(machine::belt_length(small, large, centre) == Approx(exact).epsilon(1e-4));
  CHECK_THROWS_AS(machine::belt_length(large, small, 0.16), base::Error);
}

TEST_CASE("a belt turns at pi D n / L and drives its shaft at the ratio of the sheaves") {
  // 200 mm on a motor at 25 Hz, 125 mm on the fan, belt 1.5133 m: pi x 0.2 x 25 / 1.5133 = 10.380 Hz; fan 40 Hz.
  Machine machine;
  machine::Shaft fan;
  fan.name = "fan";
  fan.ratio = 200.0 / 125.0;
  fan.ratio_u = machine::belt_slip_u;
  fan.belt = machine::Belt{0.2, 0.125, 1.5133};
  fan.vanes = 9;
  machine.shafts = {fan};
  const auto list = machine::forcing_frequencies(machine, hertz(25.0, 0.01));
  CHECK(named(list, "belt of fan").frequency.value == Approx(10.380).epsilon(1e-4));
  CHECK(named(list, "2x belt of fan").frequency.value == Approx(20.760).epsilon(1e-4));
  CHECK(named(list, "1x of fan").frequency.value == Approx(40.0));
  CHECK(named(list, "3x of fan").frequency.value == Approx(120.0));
  CHECK(named(list, "vane pass of fan (9x)").frequency.value == Approx(360.0));
  CHECK(*named(list, "1x of fan").frequency.u == Approx(0.4).epsilon(0.01));
}

TEST_CASE("the drive's carrier stands in the list, and bearings alike stand once") {
  Machine machine = two_pole_pump();
  machine.supply = machine::Supply::drive;
  machine.drive_switching_hz = 4000.0;
  auto bearing = *machine::bearing_named("6205");
  machine.bearings = {bearing, bearing};
  machine.bearings[1].name = "6205 at the fan";
  const auto list = machine::forcing_frequencies(machine, hertz(30.0, 0.01));
  CHECK(named(list, "drive switching").frequency.value == 4000.0);
  CHECK(named(list, "outer ring of bearing 6205 or 6205 at the fan").frequency.value == Approx(107.544).epsilon(2e-4));
}

TEST_CASE("the smallest distance to be parted is that of the motor's side bands, or of 2x and twice line frequency") {
  Machine four;
  four.line_frequency_hz = 50.0;
  four.motor_poles = 4;
  const auto bands = machine::smallest_distance(four, 1478.0 / 60.0);
  REQUIRE(bands);
  CHECK(bands->distance_hz == Approx(0.73333).epsilon(1e-4));  // 2x 49.267 and the line's hum at 50
  four.supply = machine::Supply::drive;
  CHECK(machine::smallest_distance(four, 1478.0 / 60.0)->distance_hz == Approx(0.739).epsilon(1e-3));
  const auto two = machine::smallest_distance(two_pole_pump(), 2960.0 / 60.0);
  REQUIRE(two);
  CHECK(two->distance_hz == Approx(0.66667).epsilon(1e-4));  // 1x 49.333 and 50
  Machine fan;
  CHECK(machine::smallest_distance(fan, 20.0)->distance_hz == Approx(20.0));
}
