#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/rotation/runup.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double pi = std::numbers::pi;
constexpr double rate = 4096.0;

double turns_at(double t) { return 40.0 * t - 0.5 * 1.5 * t * t; }

// A coast-down with one pulse a turn, rising at whole turns, and 1x of 3 m/s2 peak with a lag of 120 degrees.
MemoryReader coast_down(std::vector<recording::Segment> segments = {}) {
  const auto pulse = [](double t) {
    const double phase = turns_at(t) - std::floor(turns_at(t) + 0.5);
    return 2.5 * (std::tanh(phase / 0.01) - std::tanh((phase - 0.08) / 0.01));
  };
  const auto vibration = [](double t) { return 3.0 * std::cos(2.0 * pi * turns_at(t) - 120.0 * pi / 180.0); };
  return {rate,
          {{"motor", sampled(rate, 16.0, vibration)},
           {"mark", sampled(rate, 16.0, pulse), base::Quantity::pulse, recording::Role::tacho}},
          std::move(segments)};
}

}  // namespace

TEST_CASE("from a recording to pulses, speed, tracks and waterfall in one call") {
  const auto reader = coast_down();
  const auto answer = rotation::runup(reader, {}, {});
  REQUIRE(answer);
  const rotation::Runup& run = *answer;
  CHECK(run.speed.trend() == rotation::Trend::coast_down);
  CHECK(run.speed.speed_range().hi == Approx(40.0).epsilon(0.01));
  CHECK(run.speed.speed_range().lo == Approx(16.0).epsilon(0.02));
  CHECK(run.findings.empty());
  REQUIRE(run.tracks.size() == 3);  // 1x, 2x, 3x of the one vibration channel
  const rotation::OrderTrack& first = run.tracks[0];
  CHECK(first.channel == "motor");
  for (std::size_t i = 0; i < first.value.size(); ++i) {
    CHECK(first.amplitude_rms(i) == Approx(3.0 / std::numbers::sqrt2).epsilon(0.01));
    CHECK(std::abs(first.phase_lag_deg(i) - 120.0) < 2.0);
    CHECK(*first.sweep_hz_per_s[i] == Approx(-1.5).epsilon(0.1));
  }
  REQUIRE(run.waterfalls.size() == 1);
  CHECK(run.waterfalls[0].rows[20].speed_hz);
  CHECK(*run.waterfalls[0].rows[20].speed_hz == Approx(40.0 - 1.5 * run.waterfalls[0].rows[20].time_s).epsilon(0.01));
}

TEST_CASE("of a recording with a gap the longest part is used, and that is said") {
  const auto reader = coast_down({{0, 24576, 0.0}, {24576, 40960, 8.0}});  // a pause of 2 s after 6 s
  const auto answer = rotation::runup(reader, {}, {});
  REQUIRE(answer);
  CHECK(answer->speed.time_s().lo > 8.0);
  REQUIRE(answer->findings.size() == 1);
  CHECK(answer->findings[0].code == base::Code::gap);
}

TEST_CASE("a part of the recording can be asked for") {
  const auto reader = coast_down();
  rotation::RunupSettings settings;
  settings.time_s = base::Interval{4.0, 9.0};
  settings.with_waterfall = false;
  const auto answer = rotation::runup(reader, settings, {});
  REQUIRE(answer);
  CHECK(answer->speed.time_s().lo >= 4.0);
  CHECK(answer->speed.time_s().hi <= 9.0);
  CHECK(answer->waterfalls.empty());
}

TEST_CASE("without a tacho, and with too few turns, there is a refusal that says what to record") {
  const MemoryReader silent(rate, {{"motor", std::vector<double>(10000, 1.0)}});
  const auto none = rotation::runup(silent, {}, {});
  REQUIRE_FALSE(none);
  CHECK(none.refusal().code == "no-tacho");

  const auto reader = coast_down();
  rotation::RunupSettings settings;
  settings.time_s = base::Interval{4.0, 4.2};
  const auto few = rotation::runup(reader, settings, {});
  REQUIRE_FALSE(few);
  CHECK(few.refusal().code == "too-few-turns");
}
