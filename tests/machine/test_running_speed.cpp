#include <cmath>
#include <numbers>

#include "stillmass/machine/running_speed.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using machine::Machine;
using machine::Peak;
using std::numbers::pi;

namespace {

base::Estimate hertz(double value, std::optional<double> u = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.quantity = base::Quantity::frequency;
  return out;
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

constexpr double line = 0.25;

}  // namespace

TEST_CASE("the running speed is the strongest line within the slip of the motor") {
  const Machine machine = two_pole_pump();
  const std::vector<Peak> peaks = {
      {hertz(25.0), 9.0}, {hertz(49.31, 0.01), 3.0}, {hertz(50.0), 5.0}, {hertz(48.6, 0.01), 0.5}, {hertz(98.6), 4.0}};
  const auto speed = machine::running_speed(peaks, machine);
  REQUIRE(speed);
  CHECK(speed->value == 49.31);  // not the line's own 50 Hz
  CHECK(speed->quantity == base::Quantity::speed);
  const auto joint = machine::running_speed(peaks, machine, line);
  REQUIRE(joint);
  CHECK(joint->speed.value == Approx(49.31).margin(0.01));
}

TEST_CASE("no line, or two alike, leave the speed unknown") {
  const Machine machine = two_pole_pump();
  const std::vector<Peak> none = {{hertz(31.0), 9.0}};
  CHECK(machine::running_speed(none, machine).refusal().code == "speed-unknown");
  CHECK(machine::running_speed(none, machine, line).refusal().code == "speed-unknown");
  const std::vector<Peak> two = {{hertz(48.9), 3.0}, {hertz(49.3), 2.5}};
  CHECK(machine::running_speed(two, machine).refusal().code == "speed-unknown");
  CHECK(machine::running_speed(two, machine, line).refusal().code == "speed-unknown");
  CHECK_FALSE(machine::running_speed(two, Machine{}));
  CHECK_FALSE(machine::running_speed(two, Machine{}, line));
}

TEST_CASE("of two lines alike the one with harmonics is the speed") {
  const std::vector<Peak> peaks = {
      {hertz(48.9, 0.01), 3.0}, {hertz(49.3, 0.01), 2.5}, {hertz(98.6, 0.02), 0.5}, {hertz(295.8, 0.02), 0.2}};
  const auto speed = machine::running_speed(peaks, two_pole_pump(), line);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(49.3).margin(0.005));
  CHECK(speed->lines.size() == 3);
}

TEST_CASE("a neighbour's stronger line does not count against harmonics of a weaker one") {
  const std::vector<Peak> peaks = {
      {hertz(48.9, 0.01), 9.0}, {hertz(49.3, 0.01), 2.5}, {hertz(98.6, 0.02), 0.5}, {hertz(295.8, 0.02), 0.2}};
  const auto speed = machine::running_speed(peaks, two_pole_pump(), line);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(49.3).margin(0.005));
}

TEST_CASE("the line frequency's harmonics are not the motor's") {
  // 2x would be 99.9 Hz: the line at 100 Hz is within a line of it, and stronger.
  const std::vector<Peak> peaks = {
      {hertz(49.95, 0.002), 1.0}, {hertz(100.0, 0.0005), 5.0}, {hertz(149.85, 0.002), 1.0}};
  const auto speed = machine::running_speed(peaks, two_pole_pump(), line);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(49.95).margin(0.002));
}

TEST_CASE("a foreign line near one order is left out, even where it is the most exact") {
  const double n = 24.63;
  std::vector<Peak> peaks;
  for (const double k : {1.0, 2.0, 3.0, 6.0}) peaks.push_back({hertz(k * n, 0.004), 1.0});
  peaks[3].frequency = hertz(6.0 * n + 0.2, 0.0004);  // someone else's, within a line of the vane pass
  Machine pump;
  pump.speed_hz = base::Interval{24.6, 24.6};
  pump.vanes = 6;
  const auto speed = machine::running_speed(peaks, pump, line);
  REQUIRE(speed);
  CHECK(std::abs(speed->speed.value - n) < 0.002);
  CHECK(*speed->speed.u < 0.003);
  CHECK(speed->lines.size() == 4);
  CHECK_FALSE(speed->lines.back().used);
  CHECK(speed->lines.back().residual_hz == Approx(0.2).margin(0.01));
}

TEST_CASE("without a line at 1x two other orders stand in for it") {
  const std::vector<Peak> peaks = {{hertz(49.26, 0.01), 1.0}, {hertz(147.78, 0.01), 2.0}};
  Machine pump;
  pump.speed_hz = base::Interval{24.6, 24.6};
  pump.vanes = 6;
  const auto speed = machine::running_speed(peaks, pump, line);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(24.63).margin(0.003));
  const std::vector<Peak> one = {{hertz(147.78, 0.01), 2.0}};
  CHECK_FALSE(machine::running_speed(one, pump, line));
}

TEST_CASE("with line frequency and poles alone the speed is looked for within the slip of the motor") {
  Machine motor;
  motor.line_frequency_hz = 50.0;
  motor.motor_poles = 4;
  const auto range = machine::possible_speeds(motor);
  REQUIRE(range);
  CHECK(range->lo == Approx(23.0));
  CHECK(range->hi == Approx(24.9875));
  const std::vector<Peak> peaks = {{hertz(20.0), 9.0}, {hertz(24.63, 0.01), 1.0}, {hertz(50.0), 5.0}};
  CHECK(machine::running_speed(peaks, motor, line)->speed.value == Approx(24.63));
  CHECK_FALSE(machine::possible_speeds(Machine{}));
}

TEST_CASE("of blind families the one whose multiples are there is the speed, not its half, third or double") {
  std::vector<Peak> peaks;
  for (const double k : {1.0, 2.0, 3.0, 6.0}) peaks.push_back({hertz(18.2 * k, 0.01), 2.0 / k});
  peaks.push_back({hertz(50.0, 0.01), 0.5});
  const std::vector<machine::SpeedCandidate> candidates = {
      {hertz(9.1, 0.01), 4}, {hertz(18.2 / 3.0, 0.01), 4}, {hertz(18.2, 0.01), 4}, {hertz(36.4, 0.01), 2}};
  const auto speed = machine::running_speed(peaks, Machine{}, line, candidates);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(18.2).margin(0.005));
  CHECK_FALSE(machine::running_speed(peaks, Machine{}, line, {}));
}

TEST_CASE("1x and 2x alone are not the second and fourth multiple of half the speed") {
  const std::vector<Peak> peaks = {{hertz(18.2, 0.01), 1.0}, {hertz(36.4, 0.01), 0.5}};
  const std::vector<machine::SpeedCandidate> candidates = {{hertz(9.1, 0.01), 2}, {hertz(18.2, 0.01), 2}};
  const auto speed = machine::running_speed(peaks, Machine{}, line, candidates);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(18.2).margin(0.005));
}

TEST_CASE("two families alike are refused, unless a motor on the line can only be one of them") {
  std::vector<Peak> peaks;
  for (const double k : {1.0, 2.0, 3.0}) {
    peaks.push_back({hertz(24.6 * k, 0.01), 1.0});
    peaks.push_back({hertz(17.9 * k, 0.01), 1.0});
  }
  const std::vector<machine::SpeedCandidate> candidates = {{hertz(17.9, 0.01), 3}, {hertz(24.6, 0.01), 3}};
  CHECK_FALSE(machine::running_speed(peaks, Machine{}, line, candidates));
  Machine on_line;
  on_line.line_frequency_hz = 50.0;
  const auto speed = machine::running_speed(peaks, on_line, line, candidates);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(24.6).margin(0.005));
}

TEST_CASE("the 95 % interval of the speed holds it, from few lines and many") {
  const std::size_t channels = GENERATE(1, 5);
  constexpr int draws = 4000;
  const numeric::Random random(20261201 + channels);
  Machine pump;
  pump.speed_hz = base::Interval{24.6, 24.6};
  pump.vanes = 6;
  int held = 0;
  for (std::uint64_t draw = 0; draw < draws; ++draw) {
    std::uint32_t next = 0;
    const auto normal = [&] { return random.normal(draw, next++); };
    std::vector<Peak> peaks;
    for (std::size_t c = 0; c < channels; ++c) {
      for (const double k : {1.0, 2.0, 6.0}) {
        const double u = 0.002 * (1.0 + static_cast<double>(c));
        peaks.push_back({hertz(24.63 * k + u * normal(), u), 1.0, c});
      }
    }
    const auto speed = machine::running_speed(peaks, pump, line);
    if (speed && std::abs(speed->speed.value - 24.63) <= 1.96 * *speed->speed.u) ++held;
  }
  const double share = static_cast<double>(held) / draws;
  INFO(share);
  CHECK(share > 0.94);  // 95 % less three standard deviations of 4000 draws
  CHECK(share < 0.985);
}

TEST_CASE("the 95 % interval holds the mean speed of a machine whose load sways") {
  const double sway = GENERATE(0.0005, 0.002);  // relative amplitude, over a period of 7 to 20 s
  constexpr double rate = 512.0;
  constexpr double duration = 40.0;
  constexpr int draws = 40;
  Machine pump;
  pump.speed_hz = base::Interval{24.6, 24.6};
  pump.vanes = 6;
  const numeric::Random random(77);
  int held = 0;
  double wander = 0.0;
  for (std::uint64_t draw = 0; draw < draws; ++draw) {
    const double n = 24.63 + 0.05 * (2.0 * random.uniform(draw, 0) - 1.0);
    const double period = 7.0 + 13.0 * random.uniform(draw, 1);
    const double begin = 2.0 * pi * random.uniform(draw, 2);
    std::vector<double> samples(static_cast<std::size_t>(rate * duration));
    const auto turns = [&](double t) {
      return n * (t - sway * period / (2.0 * pi) * (std::cos(2.0 * pi * t / period + begin) - std::cos(begin)));
    };
    const double mean = turns(duration) / duration;
    for (std::size_t i = 0; i < samples.size(); ++i) {
      const double angle = 2.0 * pi * turns(static_cast<double>(i) / rate);
      samples[i] = std::sin(angle) + 0.5 * std::sin(2.0 * angle) + 0.5 * std::sin(6.0 * angle) +
                   0.1 * random.normal(draw, static_cast<std::uint32_t>(i));
    }
    const tests::MemoryReader reader(rate, {{"a", std::move(samples)}});
    spectral::SpectrumOptions options;
    options.resolution_hz = line;
    const auto spectra = spectral::averaged_spectra(reader, tests::all_frames(reader), options, {});
    std::vector<Peak> peaks;
    for (const auto& tone : spectral::tones(spectra[0])) {
      peaks.push_back({tone.frequency, tone.amplitude_rms.value, 0, tone.breadth});
    }
    const auto speed = machine::running_speed(peaks, pump, spectra[0].line_hz);
    REQUIRE(speed);
    wander += speed->wander / draws;
    if (std::abs(speed->speed.value - mean) <= 2.0 * *speed->speed.u) ++held;
  }
  INFO("held " << held << " of " << draws << ", wander " << wander << ", true " << sway / std::sqrt(2.0));
  CHECK(held >= 35);  // 95 % of 40 less three standard deviations is 33.9
  CHECK(wander > 0.4 * sway / std::sqrt(2.0));
  CHECK(wander < 2.5 * sway / std::sqrt(2.0));
}
