#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/rotation/angular_resampler.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::all_frames;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double pi = std::numbers::pi;
constexpr double rate = 51200.0;
constexpr double duration = 4.0;
constexpr double f0 = 20.0;
constexpr double s = 2.5;  // Hz/s

double turns_at(double t) { return f0 * t + 0.5 * s * t * t; }

rotation::SpeedCurve speed() {
  rotation::Pulses pulses;
  for (int i = 0; turns_at(duration) > i; ++i) {
    pulses.turns.push_back(i);
    pulses.time_s.push_back((-f0 + std::sqrt(f0 * f0 + 2.0 * s * i)) / s);
  }
  return rotation::SpeedCurve(pulses);
}

MemoryReader vibration(const std::function<double(double)>& signal, recording::FrameRange missing = {}) {
  return {rate, {{"a", tests::without(sampled(rate, duration, signal), missing)}}};
}

double decibel(double ratio) { return 20.0 * std::log10(ratio); }

double highest(const std::vector<double>& x) {
  double out = 0.0;
  for (const double each : x) out = std::max(out, std::abs(each));
  return out;
}

}  // namespace

TEST_CASE("an order becomes a steady tone against angle") {
  const double order = GENERATE(1.0, 3.0, 10.0, 25.0);
  const auto reader = vibration([&](double t) { return std::cos(2.0 * pi * order * turns_at(t) - 0.7); });
  const auto curve = speed();
  rotation::AngularResampler resampler(reader, all_frames(reader), curve, {64, {0}});
  const auto range = resampler.available();
  CHECK(range.size() > 64 * 95);  // of 100 turns
  const auto block = resampler.samples(range);
  double error = 0.0;
  for (std::int64_t i = range.begin; i < range.end; ++i) {
    const double truth = std::cos(2.0 * pi * order * static_cast<double>(i) / 64.0 - 0.7);
    error = std::max(error, std::abs(block.channels[0][static_cast<std::size_t>(i - range.begin)] - truth));
  }
  // The curve between pulses: third-order in 0.6 % of change a turn, about 1e-6 turns; the filters: 1e-4.
  CHECK(error < 1e-4 + 2.0 * pi * order * 2e-5);
}

TEST_CASE("a tone above the angular band does not leak into the orders") {
  // 64 samples a turn at 20 to 30 turns a second: the band ends at 640 to 960 Hz. Read without a filter these tones
  // fold.
  const double frequency = GENERATE(1200.0, 1931.0, 3000.0, 8000.0, 12345.0, 20000.0, 25000.0);
  const auto reader = vibration([&](double t) { return std::cos(2.0 * pi * frequency * t); });
  const auto curve = speed();
  rotation::AngularResampler resampler(reader, all_frames(reader), curve, {64, {0}});
  const auto range = resampler.available();
  double worst = 0.0;
  for (std::int64_t from = range.begin; from + 512 <= range.end; from += 512) {
    worst = std::max(worst, highest(resampler.samples({from, from + 512}).channels[0]));
  }
  INFO(frequency << " Hz: " << decibel(worst) << " dB");
  CHECK(decibel(worst) < -95.0);
}

TEST_CASE("samples do not depend on the block in which they are asked for") {
  const auto reader = vibration([&](double t) { return std::cos(2.0 * pi * 4.0 * turns_at(t)); });
  const auto curve = speed();
  rotation::AngularResampler resampler(reader, all_frames(reader), curve, {64, {0}});
  auto other = resampler.second();
  const auto whole = resampler.samples({1000, 3000});
  const auto part = other.samples({1700, 2100});
  for (std::size_t i = 0; i < 400; ++i) {
    CHECK(part.channels[0][i] == Approx(whole.channels[0][i + 700]).margin(3e-5));  // both within the filters' error
  }
}

TEST_CASE("what rests on invalid samples is marked, and nothing else") {
  const recording::FrameRange bad{100000, 100010};
  const auto reader = vibration([](double) { return 1.0; }, bad);
  const auto curve = speed();
  rotation::AngularResampler resampler(reader, all_frames(reader), curve, {64, {0}});
  const auto range = resampler.available();
  const auto block = resampler.samples(range);
  REQUIRE(block.invalid[0].size() == 1);
  const auto hit = block.invalid[0][0];
  const auto at = static_cast<std::int64_t>(64.0 * turns_at(static_cast<double>(bad.begin) / rate));
  CHECK(hit.begin < at);
  CHECK(at < hit.end);
  CHECK(hit.size() < 64);
  CHECK_FALSE(block.is_valid(0, {at - 10, at + 10}));
  CHECK(block.is_valid(0, {range.begin, hit.begin}));
  for (std::int64_t i = range.begin; i < hit.begin; ++i) {
    CHECK(block.channels[0][static_cast<std::size_t>(i - range.begin)] == Approx(1.0).epsilon(1e-4));
  }
}

TEST_CASE("samples beyond the recording are not available") {
  const auto reader = vibration([](double) { return 1.0; });
  const auto curve = speed();
  rotation::AngularResampler resampler(reader, all_frames(reader), curve, {64, {0}});
  CHECK_THROWS_AS(resampler.samples({resampler.available().begin - 1, 100}), base::Error);
  CHECK_THROWS_AS(rotation::AngularResampler(reader, all_frames(reader), curve, {64, {3}}), base::Error);
}
