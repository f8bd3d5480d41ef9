#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/rotation/waterfall.hpp"

#include "signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::all_frames;
using tests::MemoryReader;
using tests::sampled;

namespace {

constexpr double pi = std::numbers::pi;

MemoryReader sweep_and_tone() {
  // A sweep 20 Hz + 2 Hz/s of 1.0 peak and a tone of 300 Hz, 0.1 peak.
  const auto signal = [](double t) {
    return std::sin(2.0 * pi * (20.0 * t + t * t)) + 0.1 * std::sin(2.0 * pi * 300.0 * t);
  };
  return {2048.0, {{"a", sampled(2048.0, 40.0, signal), base::Quantity::velocity}}};
}

}  // namespace

TEST_CASE("the ridge of a waterfall follows the sweep, and a steady tone keeps its place and size") {
  const auto reader = sweep_and_tone();
  rotation::WaterfallOptions options;
  options.resolution_hz = 2.0;
  options.max_rows = 40;
  const auto waterfall = rotation::waterfalls(reader, all_frames(reader), nullptr, options, {}).at(0);
  REQUIRE(waterfall.rows.size() == 40);
  CHECK(waterfall.quantity == base::Quantity::velocity);
  for (const auto& row : waterfall.rows) {
    CHECK_FALSE(row.speed_hz);
    const auto top = std::max_element(row.amplitude.begin(), row.amplitude.end()) - row.amplitude.begin();
    // A row is a second long, in which the sweep moves 2 Hz; a line is 2 Hz wide.
    CHECK(std::abs(waterfall.lines_hz[static_cast<std::size_t>(top)] - (20.0 + 2.0 * row.time_s)) < 2.5);
    CHECK(row.amplitude[150] == Approx(0.1 / std::numbers::sqrt2).epsilon(0.01));
  }
}

TEST_CASE("fewer lines lose no peak") {
  const auto reader = sweep_and_tone();
  rotation::WaterfallOptions fine;
  fine.resolution_hz = 1.0;
  fine.max_frequency_hz = 500.0;
  rotation::WaterfallOptions coarse = fine;
  coarse.max_lines = 60;
  const auto whole = rotation::waterfalls(reader, all_frames(reader), nullptr, fine, {}).at(0);
  const auto reduced = rotation::waterfalls(reader, all_frames(reader), nullptr, coarse, {}).at(0);
  CHECK(whole.lines_hz.back() == Approx(500.0));
  CHECK(reduced.lines_hz.size() <= 60);
  for (std::size_t i = 0; i < whole.rows.size(); ++i) {
    const auto& a = whole.rows[i].amplitude;
    const auto& b = reduced.rows[i].amplitude;
    CHECK(*std::max_element(a.begin(), a.end()) == *std::max_element(b.begin(), b.end()));
  }
}

TEST_CASE("one and three threads give the same waterfall") {
  const auto reader = sweep_and_tone();
  base::Context three;
  three.threads = 3;
  const auto a = rotation::waterfalls(reader, all_frames(reader), nullptr, {}, {}).at(0);
  const auto b = rotation::waterfalls(reader, all_frames(reader), nullptr, {}, three).at(0);
  REQUIRE(a.rows.size() == b.rows.size());
  for (std::size_t i = 0; i < a.rows.size(); ++i) CHECK(a.rows[i].amplitude == b.rows[i].amplitude);
}

TEST_CASE("a resolution that the recording cannot give is the caller's error") {
  const auto reader = sweep_and_tone();
  rotation::WaterfallOptions options;
  options.resolution_hz = 0.01;
  CHECK_THROWS_AS(rotation::waterfalls(reader, all_frames(reader), nullptr, options, {}), base::Error);
}
