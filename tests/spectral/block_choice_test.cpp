#include "stillmass/spectral/block_choice.hpp"

#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/block_plan.hpp"
#include "stillmass/spectral/tone.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using spectral::BlockChoice;
using spectral::BlockReason;
using spectral::SpectrumOptions;
using spectral::Window;

namespace {

BlockChoice choice(double seconds, const SpectrumOptions& options, double rate = 2048.0, std::size_t channels = 1) {
  recording::Recording r;
  r.file = "made.wav";
  r.rate_hz = rate;
  r.frames = static_cast<std::int64_t>(seconds * rate);
  r.segments.push_back({0, r.frames, 0.0});
  r.channels.resize(channels);
  return spectral::choose_block(r, {0, r.frames}, options);
}

}  // namespace

TEST_CASE("so many lines up to a frequency give the block that has them") {
  const auto to_top = choice(60.0, {.lines = 1600});
  CHECK(to_top.length == 3200);
  CHECK(to_top.reason == BlockReason::lines_asked);
  const auto to_400 = choice(60.0, {.lines = 800, .lines_to_hz = 400.0});
  CHECK(to_400.length == 4096);
  CHECK(to_400.line_hz == Approx(0.5));
  // No fast length has 777 lines to 1024 Hz exactly: finer, not coarser.
  CHECK(choice(60.0, {.lines = 777}).line_hz <= 1024.0 / 777.0);
  CHECK_THROWS_AS(choice(60.0, {.lines = 800, .lines_to_hz = 2000.0}), base::Error);
  CHECK_THROWS_AS(choice(1.0, {.lines = 80000}), base::Error);
}

TEST_CASE("what was asked for outright is done, and the output can say so") {
  CHECK(choice(60.0, {.block_frames = 1000}).reason == BlockReason::frames_asked);
  CHECK(choice(60.0, {.block_frames = 1000}).averages == 244);
  const auto asked = choice(60.0, {.resolution_hz = 2.0});
  CHECK(asked.reason == BlockReason::resolution_asked);
  CHECK(asked.length == 1024);
  const auto coarse = choice(60.0, {.resolution_hz = 2.0, .separate_hz = 1.0});
  CHECK(coarse.length == 1024);
  CHECK_FALSE(coarse.separates());
  CHECK(choice(60.0, {}).reason == BlockReason::usual);
  CHECK(choice(60.0, {}).separates());
  CHECK(choice(60.0, {.overlap = 0.0, .block_frames = 2048}).effective_averages == Approx(60.0));
}

TEST_CASE("forcing frequencies that lie close make the lines finer, as far as 16 averages allow") {
  // Pole-pass side bands 0.5 Hz beside 1x: Hann takes lines 0.5 / 3 Hz apart.
  const auto fine = choice(120.0, {.separate_hz = 0.5});
  CHECK(fine.reason == BlockReason::separation);
  CHECK(fine.separates());
  CHECK(fine.line_hz <= 0.5 / 3.0);
  CHECK(fine.line_hz > 0.9 * 0.5 / 3.0);
  CHECK(fine.averages >= spectral::least_blocks);

  const auto usual = choice(120.0, {.separate_hz = 2.0});
  CHECK(usual.reason == BlockReason::usual_separates);
  CHECK(usual.length == choice(120.0, {}).length);

  const auto brief = choice(20.0, {.separate_hz = 0.5});
  CHECK(brief.reason == BlockReason::averages);
  CHECK_FALSE(brief.separates());
  CHECK(brief.averages >= spectral::least_blocks);
  CHECK(brief.averages <= spectral::least_blocks + 1);
  // 16 half-overlapped blocks of 6 s.
  CHECK(*brief.needed_duration_s == Approx(6.0 * 8.5));
  CHECK(brief.text().find("record 51 s") != std::string::npos);
  CHECK(choice(*brief.needed_duration_s * 1.03, {.separate_hz = 0.5}).reason == BlockReason::separation);

  // A recording shorter than a single block of that resolution.
  CHECK(choice(4.0, {.separate_hz = 0.5}).reason == BlockReason::averages);
}

TEST_CASE("many channels at a high rate keep the bound of samples held, and it is said") {
  const auto held = choice(600.0, {.separate_hz = 0.5}, 51200.0, 4);
  CHECK(held.reason == BlockReason::memory);
  CHECK_FALSE(held.separates());
  CHECK(static_cast<double>(held.length) * 4.0 <= spectral::held_samples);
  CHECK(held.text().find("memory") != std::string::npos);
}

TEST_CASE("the running speed alone asks for half orders to be parted") {
  // 120 r/min = 2 Hz: orders and half orders 1 Hz apart.
  const auto slow = choice(300.0, {.speed_hz = 0.5});
  CHECK(*slow.separate_hz == 0.25);
  CHECK(slow.reason == BlockReason::separation);
  CHECK(choice(300.0, {.speed_hz = 25.0}).reason == BlockReason::usual_separates);
  CHECK_THROWS_AS(choice(60.0, {.speed_hz = -1.0}), base::Error);
  CHECK_THROWS_AS(choice(60.0, {.separate_hz = 0.0}), base::Error);
}

TEST_CASE("two equal tones at the chosen spacing have a valley of 6 dB between them and are found as two") {
  constexpr double rate = 2048.0;
  constexpr std::size_t n = 2048;
  for (const Window window :
       {Window::rectangle, Window::hann, Window::hamming, Window::blackman_harris, Window::flat_top}) {
    const double apart = std::max(spectral::lobe_bins(window) + 1.0, 3.0);
    CHECK(spectral::separating_line_hz(window, apart) == Approx(1.0));
    for (const double off : {0.0, 0.25, 0.5, 0.8}) {
      std::vector<double> x = tests::noise(n * 16, 95);
      for (double& v : x) v *= 1e-3;
      tests::add_tone(x, rate, 100.0 + off, 1.0);
      tests::add_tone(x, rate, 100.0 + off + apart, 1.0, 1.0);
      const auto s =
          spectral::averaged_spectrum(x, rate, base::Quantity::acceleration, {.window = window, .block_frames = n});
      double valley = 1e300, peak = 1e300;
      for (std::size_t k = 100; k <= 100 + static_cast<std::size_t>(apart) + 1; ++k)
        valley = std::min(valley, s.density[k]);
      for (const double tone : {100.0 + off, 100.0 + off + apart}) {
        peak = std::min(
            peak, std::max(s.density[static_cast<std::size_t>(tone)], s.density[static_cast<std::size_t>(tone) + 1]));
      }
      CAPTURE(spectral::name(window), off);
      CHECK(valley < 0.26 * peak);
      CHECK(spectral::tones(s, {.strongest = 5, .prominence = 10.0, .band_hz = base::Interval{90.0, 115.0}}).size() ==
            2);
    }
  }
}
