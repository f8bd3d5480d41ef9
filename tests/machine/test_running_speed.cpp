#include <cmath>
#include <numbers>
#include <set>

#include "stillmass/machine/forcing.hpp"
#include "stillmass/machine/running_speed.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

#include "machine/machines.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using machine::Machine;
using machine::Peak;
using std::numbers::pi;
using tests::hertz;
using tests::two_pole_pump;

namespace {

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

TEST_CASE("in a wide range of speeds 2x is not taken for the speed, even where it is the stronger") {
  Machine driven;
  driven.supply = machine::Supply::drive;
  driven.speed_hz = base::Interval{10.0, 25.0};
  const std::vector<Peak> peaks = {{hertz(12.03, 0.01), 1.0}, {hertz(24.06, 0.01), 2.5}, {hertz(36.09, 0.01), 0.3}};
  const auto speed = machine::running_speed(peaks, driven, line);
  REQUIRE(speed);
  CHECK(speed->speed.value == Approx(12.03).margin(0.005));
  CHECK(speed->searched_hz == base::Interval{10.0, 25.0});
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

namespace {

// Turns of a machine whose speed does not hold still, by 1/100 s.
enum class Motion { sway, drift, random_walk };

std::vector<double> turns_of(Motion motion, double speed_hz, double relative, double duration_s, std::uint64_t draw) {
  const numeric::Random random(77 + static_cast<std::uint64_t>(motion));
  const double period = 7.0 + 13.0 * random.uniform(draw, 1);
  const double begin = 2.0 * pi * random.uniform(draw, 2);
  const auto steps = static_cast<std::size_t>(duration_s * 100.0) + 2;
  std::vector<double> turns = {0.0};
  double walk = 0.0;
  for (std::size_t i = 0; i < steps; ++i) {
    const double t = static_cast<double>(i) / 100.0;
    walk +=
        relative * std::sqrt(0.02 / 5.0) * random.normal(draw, 10 + static_cast<std::uint32_t>(i)) - walk * 0.01 / 5.0;
    const double off = motion == Motion::sway ? relative * std::numbers::sqrt2 * std::sin(2.0 * pi * t / period + begin)
                       : motion == Motion::drift ? relative * std::sqrt(12.0) * (t / duration_s - 0.5)
                                                 : walk;
    turns.push_back(turns.back() + 0.01 * speed_hz * (1.0 + off));
  }
  return turns;
}

double at(const std::vector<double>& turns, double t) {
  const auto i = static_cast<std::size_t>(t * 100.0);
  return turns[i] + (t * 100.0 - static_cast<double>(i)) * (turns[i + 1] - turns[i]);
}

}  // namespace

TEST_CASE("the 95 % interval holds the mean speed of a machine that does not hold its speed") {
  const Motion motion = GENERATE(Motion::sway, Motion::drift, Motion::random_walk);
  const double relative = GENERATE(0.0002, 0.001, 0.003);  // standard deviation of the speed
  constexpr double rate = 512.0;
  constexpr double duration = 40.0;
  constexpr int draws = 40;
  Machine pump;
  pump.speed_hz = base::Interval{24.6, 24.6};
  pump.vanes = 6;
  int held = 0;
  int answered = 0;
  double wander = 0.0;
  double u = 0.0;
  for (std::uint64_t draw = 0; draw < draws; ++draw) {
    const numeric::Random random(78);
    const double n = 24.63 + 0.05 * (2.0 * random.uniform(draw, 0) - 1.0);
    const std::vector<double> turns = turns_of(motion, n, relative, duration, draw);
    std::vector<double> samples(static_cast<std::size_t>(rate * duration));
    const double mean = at(turns, duration) / duration;
    for (std::size_t i = 0; i < samples.size(); ++i) {
      const double angle = 2.0 * pi * at(turns, static_cast<double>(i) / rate);
      samples[i] = std::sin(angle) + 0.5 * std::sin(2.0 * angle) + 0.5 * std::sin(6.0 * angle) +
                   0.1 * random.normal(draw, 1 + static_cast<std::uint32_t>(i));
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
    if (!speed) continue;
    ++answered;
    wander += speed->wander;
    u += *speed->speed.u;
    if (std::abs(speed->speed.value - mean) <= 2.0 * *speed->speed.u) ++held;
  }
  INFO("motion " << static_cast<int>(motion) << ", held " << held << " of " << answered << ", mean wander "
                 << wander / answered << ", true " << relative << ", mean u " << u / answered << " Hz");
  CHECK(answered == draws);
  CHECK(held >= 0.875 * answered);  // 95 % of 40 less two standard deviations of the count
  CHECK(wander / answered < 2.5 * relative);
}

TEST_CASE("the demo's pump turns at 1478 r/min, and its lines are named by what makes them") {
  // data/demo/skid.toml: speed_rpm = 1478, wander 0.001, four poles on 50 Hz, six vanes; forces at 1x, 2x, 6x, 12x and
  // twice the line frequency.
  const auto reader = recording::open(tests::demo_file("duty.wav"));
  const auto spectra = spectral::averaged_spectra(*reader, tests::all_frames(*reader), {}, {});
  std::vector<Peak> peaks;
  for (std::size_t c = 0; c < spectra.size(); ++c) {
    for (const auto& tone : spectral::tones(spectral::as_quantity(spectra[c], base::Quantity::velocity))) {
      peaks.push_back({tone.frequency, tone.amplitude_rms.value, c, tone.breadth});
    }
  }
  Machine pump;
  pump.speed_hz = base::Interval{1470.0 / 60.0, 1470.0 / 60.0};  // as a name plate rounds it
  pump.line_frequency_hz = 50.0;
  pump.motor_poles = 4;
  pump.vanes = 6;
  const double line_hz = spectra.front().line_hz;
  const auto speed = machine::running_speed(peaks, pump, line_hz);
  REQUIRE(speed);
  INFO("speed " << speed->speed.value << " u " << *speed->speed.u << " wander " << speed->wander << " of "
                << speed->lines.size() << " lines");
  CHECK(std::abs(speed->speed.value - 1478.0 / 60.0) < 2.0 * *speed->speed.u + 2e-4 * speed->speed.value);
  CHECK(*speed->speed.u < 5e-4 * speed->speed.value);
  CHECK(speed->wander < 0.0015);
  const auto forcing = machine::forcing_frequencies(pump, speed->speed);
  std::set<std::string> causes;
  for (const Peak& peak : peaks) causes.insert(machine::cause_of_peak(peak.frequency, line_hz, forcing).text);
  for (const char* each : {"1x", "2x", "vane pass (6x)", "twice vane pass (12x)", "twice line frequency"}) {
    CAPTURE(each);
    CHECK(causes.count(each) == 1);
  }
}
