#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/rotation/tacho.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::all_frames;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double rate = 5120.0;

// Angle of a run-up from f0 at s Hz/s, turns.
double turns_at(double f0, double s, double t) { return f0 * t + 0.5 * s * t * t; }
double time_of(double f0, double s, double turn) { return (-f0 + std::sqrt(f0 * f0 + 2.0 * s * turn)) / s; }

// A pulse of 5 V, a twentieth of a turn wide, with edges a few samples long as an anti-aliasing filter leaves them.
double pulse(double turn) {
  const double phase = turn - std::floor(turn);
  const double edge = 0.004;
  const auto step = [&](double x) { return 0.5 + 0.5 * std::tanh(x / edge); };
  return 5.0 * (step(phase - 0.1) - step(phase - 0.15));
}

MemoryReader tacho(std::vector<double> samples) {
  return {rate, {{"tacho", std::move(samples), base::Quantity::pulse, recording::Role::tacho}}};
}

base::Answer<rotation::Pulses> pulses_of(const recording::Reader& reader, rotation::TachoOptions options = {}) {
  return rotation::find_pulses(reader, all_frames(reader), options, {});
}

}  // namespace

TEST_CASE("pulses of a run-up are found between the samples, every turn once") {
  const double f0 = 10.0;
  const double s = 2.0;
  const auto reader = tacho(sampled(rate, 10.0, [&](double t) { return pulse(turns_at(f0, s, t)); }));
  const auto pulses = pulses_of(reader);
  REQUIRE(pulses);
  CHECK(pulses->threshold == Approx(2.5).margin(0.05));
  REQUIRE(pulses->time_s.size() == 200);  // 10 * 10 + 100 turns
  CHECK(pulses->missing == 0);
  CHECK(pulses->extra == 0);
  for (std::size_t i = 0; i < pulses->time_s.size(); ++i) {
    const double truth = time_of(f0, s, static_cast<double>(i) + 0.1);
    // The edge is two to four samples long; a straight line across its middle is good to a tenth of a sample.
    CHECK(std::abs(pulses->time_s[i] - truth) < 0.1 / rate);
    CHECK(pulses->turns[i] == static_cast<double>(i));
  }
  REQUIRE(pulses->time_u);
  CHECK(*pulses->time_u < 0.1 / rate);
}

TEST_CASE("the last turns of a shaft that comes to rest are no missing pulses") {
  // A speed that falls evenly to nothing: 10 Hz less 1 Hz in every second.
  const auto reader = tacho(sampled(rate, 10.0, [&](double t) { return pulse(turns_at(10.0, -1.0, t)); }));
  const auto pulses = pulses_of(reader);
  REQUIRE(pulses);
  CHECK(pulses->missing == 0);
  CHECK(pulses->extra == 0);
  CHECK(pulses->time_s.size() >= 44);  // of 50
}

TEST_CASE("the falling edge comes later by the width of the pulse") {
  const auto reader = tacho(sampled(rate, 2.0, [](double t) { return pulse(20.0 * t); }));
  rotation::TachoOptions falling;
  falling.edge = rotation::Edge::falling;
  const auto up = pulses_of(reader);
  const auto down = pulses_of(reader, falling);
  REQUIRE(up);
  REQUIRE(down);
  CHECK(down->time_s[3] - up->time_s[3] == Approx(0.05 / 20.0).margin(0.1 / rate));
}

TEST_CASE("a pick-up whose voltage grows with the speed is read at its zero crossing") {
  const auto reader = tacho(sampled(rate, 8.0, [](double t) {
    const double speed = 8.0 + 4.0 * t;
    return 0.05 * speed * std::sin(2.0 * std::numbers::pi * turns_at(8.0, 4.0, t));
  }));
  const auto pulses = pulses_of(reader);
  REQUIRE(pulses);
  const double first = turns_at(8.0, 4.0, pulses->time_s.front());
  for (std::size_t i = 0; i < pulses->time_s.size(); ++i) {
    CHECK(turns_at(8.0, 4.0, pulses->time_s[i]) - first == Approx(pulses->turns[i]).margin(2e-3));
  }
  CHECK(std::abs(pulses->threshold) < 0.1);
  CHECK(pulses->time_s.size() > 180);  // of 192
}

TEST_CASE("noise of a fifth of the pulse's height neither adds nor loses a pulse") {
  const numeric::Random random(11);
  auto samples = sampled(rate, 10.0, [](double t) { return pulse(15.0 * t); });
  for (std::size_t i = 0; i < samples.size(); ++i) samples[i] += 0.25 * random.normal(i, 0);
  const auto reader = tacho(samples);
  rotation::TachoOptions options;
  options.hysteresis = 2.5;
  const auto pulses = pulses_of(reader, options);
  REQUIRE(pulses);
  CHECK(pulses->time_s.size() == 150);
  CHECK(pulses->missing == 0);
  CHECK(pulses->extra == 0);
}

TEST_CASE("the scatter of the pulses gives the uncertainty of their time, whatever the sweep") {
  const numeric::Random random(3);
  std::vector<double> times;
  for (int i = 0; i < 400; ++i) {
    times.push_back(time_of(10.0, 3.0, i) + 1e-4 * random.normal(static_cast<std::uint64_t>(i), 0));
  }
  const auto pulses = rotation::repaired_pulses(times, 1);
  REQUIRE(pulses);
  REQUIRE(pulses->time_u);
  CHECK(*pulses->time_u ==
        Approx(1e-4).epsilon(0.15));  // 400 values: 1/sqrt(2 * 400) = 3.5 %, MAD and overlap: twice that
}

TEST_CASE("missing pulses are counted and leave the angle right") {
  std::vector<double> times;
  for (int i = 0; i < 300; ++i) {
    if (i == 40 || i == 41 || i == 120 || i == 200) continue;
    times.push_back(time_of(10.0, 1.0, i));
  }
  const auto pulses = rotation::repaired_pulses(times, 1);
  REQUIRE(pulses);
  CHECK(pulses->missing == 4);
  CHECK(pulses->extra == 0);
  CHECK(pulses->turns.back() == 299.0);
  REQUIRE(pulses->findings.size() == 1);
  CHECK(pulses->findings[0].code == base::Code::missing_pulses);
  CHECK(*pulses->findings[0].from_s == Approx(time_of(10.0, 1.0, 39)));
}

TEST_CASE("doubled pulses and one in the middle of a turn are dropped") {
  std::vector<double> times;
  for (int i = 0; i < 300; ++i) {
    times.push_back(time_of(10.0, 1.0, i));
    if (i % 10 == 3) times.push_back(time_of(10.0, 1.0, i + 0.06));
    if (i == 55 || i == 150) times.push_back(time_of(10.0, 1.0, i + 0.5));
  }
  const auto pulses = rotation::repaired_pulses(times, 1);
  REQUIRE(pulses);
  CHECK(pulses->extra == 32);
  CHECK(pulses->missing == 0);
  CHECK(pulses->time_s.size() == 300);
  CHECK(pulses->turns.back() == 299.0);
  CHECK(pulses->findings.at(0).code == base::Code::extra_pulses);
}

TEST_CASE("every pulse doubled still counts every turn once") {
  std::vector<double> times;
  for (int i = 0; i < 100; ++i) {
    times.push_back(i / 25.0);
    times.push_back((i + 0.1) / 25.0);
  }
  const auto pulses = rotation::repaired_pulses(times, 1);
  REQUIRE(pulses);
  CHECK(pulses->time_s.size() == 100);
  CHECK(pulses->extra == 100);
}

TEST_CASE("several pulses per turn number the turns in fractions") {
  std::vector<double> times;
  for (int i = 0; i <= 240; ++i) times.push_back(i / 60.0 / 25.0);
  const auto pulses = rotation::repaired_pulses(times, 60);
  REQUIRE(pulses);
  CHECK(pulses->turns.back() == Approx(4.0));
}

TEST_CASE("a dead channel, and pulses at random, are refused") {
  const auto dead = tacho(std::vector<double>(10000, 0.7));
  const auto none = pulses_of(dead);
  REQUIRE_FALSE(none);
  CHECK(none.refusal().code == "no-pulses");

  const numeric::Random random(5);
  std::vector<double> times;
  for (std::uint64_t i = 0; i < 200; ++i) times.push_back(10.0 * random.uniform(i, 0));
  std::sort(times.begin(), times.end());
  CHECK_FALSE(rotation::repaired_pulses(times, 1));
}

TEST_CASE("no pulse is found across samples that are not valid") {
  const recording::FrameRange bad{10100, 10500};
  const auto reader = tacho(tests::without(sampled(rate, 4.0, [](double t) { return pulse(20.0 * t); }), bad));
  const auto pulses = pulses_of(reader);
  REQUIRE(pulses);
  CHECK(pulses->missing >= 1);
  CHECK(pulses->turns.back() == 79.0);
  for (const double t : pulses->time_s) {
    CHECK_FALSE((t > static_cast<double>(bad.begin) / rate && t < static_cast<double>(bad.end) / rate));
  }
}
