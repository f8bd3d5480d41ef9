#include <algorithm>

#include "stillmass/machine/bearing.hpp"
#include "stillmass/machine/forcing.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using machine::Forcing;
using machine::Machine;

namespace {

base::Estimate hertz(double value, std::optional<double> u = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.quantity = base::Quantity::frequency;
  return out;
}

const Forcing& named(const std::vector<Forcing>& list, const std::string& name) {
  const auto at = std::find_if(list.begin(), list.end(), [&](const Forcing& each) { return each.name == name; });
  REQUIRE(at != list.end());
  return *at;
}

Machine two_pole_pump() {
  Machine out;
  out.kind = machine::MachineKind::pump;
  out.speed_hz = base::Interval{2960.0 / 60.0, 2960.0 / 60.0};
  out.line_frequency_hz = 50.0;
  out.motor_poles = 2;
  out.vanes = 6;
  return out;
}

modal::Mode mode_at(double frequency, double zeta) {
  modal::Mode out;
  out.frequency = hertz(frequency, 0.1);
  out.damping_ratio.value = zeta;
  return out;
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
  CHECK(std::count_if(list.begin(), list.end(),
                      [](const Forcing& each) { return each.kind == machine::ForcingKind::gear_mesh; }) == 1);
}

TEST_CASE("on a drive the electrical frequency follows the speed") {
  Machine machine = two_pole_pump();
  machine.supply = machine::Supply::drive;
  const auto list = machine::forcing_frequencies(machine, hertz(30.0, 0.01));
  const Forcing& electrical = named(list, "twice drive frequency");
  CHECK(electrical.frequency.value == Approx(60.9));
  CHECK(electrical.frequency.value - 3.0 * *electrical.frequency.u < 60.0);
}

TEST_CASE("2x of a two-pole motor and twice line frequency are told apart only where the lines are fine enough") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));  // 2x: 98.8 Hz, 1.2 Hz below 100
  const auto coarse = machine::cause_of_peak(hertz(99.2, 0.1), 1.25, list);
  CHECK(coarse.ambiguous);
  CHECK_FALSE(coarse.forcing);
  CHECK(coarse.candidates.size() == 2);
  CHECK(coarse.strength == base::Strength::weak);
  CHECK(coarse.text.find("2x") != std::string::npos);
  CHECK(coarse.text.find("twice line frequency") != std::string::npos);

  const auto low = machine::cause_of_peak(hertz(98.81, 0.02), 0.25, list);
  CHECK_FALSE(low.ambiguous);
  CHECK(low.text == "2x");
  CHECK(low.strength == base::Strength::strong);
  const auto high = machine::cause_of_peak(hertz(99.99, 0.02), 0.25, list);
  CHECK(high.text == "twice line frequency");
}

TEST_CASE("a tight fit counts before a bearing that could be anywhere near") {
  Machine machine = two_pole_pump();
  machine.bearings = {{"wide", 8, 0.010, 0.0405, 0.0, ""}};  // outer ring 3.01 per turn
  const auto list = machine::forcing_frequencies(machine, hertz(49.4, 0.01));
  const auto cause = machine::cause_of_peak(hertz(148.2, 0.05), 0.5, list);
  CHECK(cause.text == "3x");
  const auto beside = machine::cause_of_peak(hertz(150.9, 0.05), 0.5, list);
  CHECK(beside.text == "outer ring of bearing wide");
  CHECK(beside.strength == base::Strength::fair);
}

TEST_CASE("a peak that no forcing explains is a natural frequency where one is, else unknown") {
  const auto list = machine::forcing_frequencies(two_pole_pump(), hertz(49.4, 0.01));
  const std::vector<modal::Mode> modes = {mode_at(31.0, 0.02)};
  const auto natural = machine::cause_of_peak(hertz(31.3, 0.05), 0.5, list, modes);
  CHECK(natural.text == "natural frequency 31 Hz");
  CHECK(natural.mode == std::size_t{0});
  CHECK_FALSE(natural.forcing);
  const auto unknown = machine::cause_of_peak(hertz(70.0, 0.05), 0.5, list, modes);
  CHECK(unknown.text == "unknown");
  CHECK(unknown.candidates.empty());
}

TEST_CASE("the running speed is the strongest line within the slip of the motor") {
  const Machine machine = two_pole_pump();
  const std::vector<machine::Peak> peaks = {
      {hertz(25.0), 9.0}, {hertz(49.31, 0.01), 3.0}, {hertz(50.0), 5.0}, {hertz(48.6, 0.01), 0.5}, {hertz(98.6), 4.0}};
  const auto speed = machine::running_speed(peaks, machine);
  REQUIRE(speed);
  CHECK(speed->value == 49.31);  // not the line's own 50 Hz
  CHECK(speed->quantity == base::Quantity::speed);
}

TEST_CASE("no line, or two alike, leave the speed unknown") {
  const Machine machine = two_pole_pump();
  const std::vector<machine::Peak> none = {{hertz(31.0), 9.0}};
  CHECK(machine::running_speed(none, machine).refusal().code == "speed-unknown");
  const std::vector<machine::Peak> two = {{hertz(48.9), 3.0}, {hertz(49.3), 2.5}};
  CHECK(machine::running_speed(two, machine).refusal().code == "speed-unknown");
  CHECK_FALSE(machine::running_speed(two, Machine{}));
}
