#include "stillmass/spectral/block_plan.hpp"

#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/averages.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using spectral::BlockPlan;
using spectral::BlockRun;
using spectral::Window;

namespace {

recording::Recording recorded(double rate_hz, std::vector<std::int64_t> segment_frames) {
  recording::Recording r;
  r.file = "made.wav";
  r.rate_hz = rate_hz;
  for (const std::int64_t frames : segment_frames) {
    r.segments.push_back({r.frames, frames, static_cast<double>(r.frames) / rate_hz + 0.5});
    r.frames += frames;
  }
  r.channels.resize(1);
  return r;
}

std::vector<std::int64_t> starts(const BlockPlan& plan) {
  std::vector<std::int64_t> all;
  for (const BlockRun& run : plan.runs()) {
    for (std::int64_t i = 0; i < run.count; ++i) all.push_back(run.start(i));
  }
  return all;
}

}  // namespace

TEST_CASE("blocks start anew after each gap and never cross one") {
  const auto r = recorded(100.0, {25, 7, 30});
  const auto plan = BlockPlan::overlapping(r, {0, r.frames}, 10, 0.5);
  CHECK(starts(plan) == std::vector<std::int64_t>{0, 5, 10, 15, 32, 37, 42, 47, 52});
  CHECK(plan.blocks() == 9);
  CHECK(plan.blocks() == spectral::count_blocks(r, {0, r.frames}, 10, 0.5));
}

TEST_CASE("a range cuts the blocks to those that lie within it") {
  const auto r = recorded(100.0, {100});
  CHECK(starts(BlockPlan::overlapping(r, {3, 28}, 10, 0.7)) == std::vector<std::int64_t>{3, 6, 9, 12, 15, 18});
}

TEST_CASE("the parts of a plan are the plan, however it is cut") {
  const auto r = recorded(100.0, {250, 70, 300});
  const auto plan = BlockPlan::overlapping(r, {0, r.frames}, 32, 0.75);
  for (const std::int64_t cut : {1, 7, 64, 1000}) {
    std::vector<std::int64_t> joined;
    for (std::int64_t at = 0; at < r.frames; at += cut) {
      const auto part = starts(plan.starting_in({at, at + cut}));
      joined.insert(joined.end(), part.begin(), part.end());
    }
    CHECK(joined == starts(plan));
  }
}

TEST_CASE("a triggered block that would cross a gap or the end is left out") {
  const auto r = recorded(100.0, {50, 50});
  const std::vector<std::int64_t> at{3, 17, 41, 45, 60, 90, 91, 99};
  CHECK(starts(BlockPlan::triggered(r, {0, 100}, at, 10)) == std::vector<std::int64_t>{3, 17, 60, 90});
  CHECK_THROWS_AS(BlockPlan::triggered(r, {0, 100}, std::vector<std::int64_t>{5, 5}, 10), base::Error);
}

TEST_CASE("block lengths are fast and give lines no coarser than asked") {
  const auto r = recorded(51200.0, {51200 * 60});
  const recording::FrameRange all{0, r.frames};
  CHECK(spectral::block_length(r, all, 1.0, 0.5) == 51200);
  CHECK(spectral::block_length(r, all, 0.7, 0.5) == 73728);  // 2^13 3^2, the next after 73143
  CHECK(spectral::fast_length_at_least(7) == 8);
  CHECK(spectral::fast_length_at_most(7) == 6);
  CHECK(spectral::fast_length_at_least(1) == 1);
}

TEST_CASE("a range too short for the resolution asked is a wrong call, and says so") {
  const auto r = recorded(1000.0, {1500, 1500});
  CHECK_THROWS_AS(spectral::block_length(r, {0, r.frames}, 0.5, 0.5), base::Error);
  CHECK_THROWS_AS(spectral::block_length(r, {0, r.frames}, -1.0, 0.5), base::Error);
  CHECK_THROWS_AS(spectral::block_length(r, {0, r.frames}, 600.0, 0.5), base::Error);
  CHECK_THROWS_AS(spectral::count_blocks(r, {0, r.frames}, 10, 0.99), base::Error);
  try {
    BlockPlan::overlapping(r, {0, r.frames}, 2000, 0.5);
    FAIL("no error");
  } catch (const base::Error& error) {
    CHECK(error.kind == base::ErrorKind::usage);
    CHECK(error.where == "made.wav");
  }
}

TEST_CASE("the chosen resolution is 0.25 to 1 Hz where the length allows, coarser to keep 16 blocks where not") {
  const auto spacing = [](double rate, std::int64_t frames) {
    const auto r = recorded(rate, {frames});
    return rate / static_cast<double>(spectral::block_length(r, {0, frames}, 0.0, 0.5));
  };
  CHECK(spacing(51200.0, 51200 * 600) == Approx(0.25).epsilon(0.02));
  CHECK(spacing(51200.0, 51200 * 60) == Approx(0.54).epsilon(0.02));  // 64 blocks
  CHECK(spacing(51200.0, 51200 * 20) == Approx(1.0).epsilon(0.02));
  const auto r = recorded(51200.0, {51200 * 2});
  const auto length = spectral::block_length(r, {0, r.frames}, 0.0, 0.5);
  CHECK(spectral::count_blocks(r, {0, r.frames}, length, 0.5) >= 16);
  CHECK(51200.0 / static_cast<double>(length) < 4.5);
}

TEST_CASE("overlapped blocks are worth what Welch's formula says") {
  // CHECKS W15: K times the relative variance, K = 64: 1, 1.0547, 1.9093. W16: per block without overlap, many blocks.
  const auto worth = [](Window window, std::int64_t hop, std::int64_t count) {
    const BlockRun run{0, hop, count};
    return spectral::averages(window, 4096, {&run, 1}).effective;
  };
  CHECK(64.0 / worth(Window::hann, 4096, 64) == Approx(1.0));
  CHECK(64.0 / worth(Window::hann, 2048, 64) == Approx(1.0547).epsilon(1e-4));
  CHECK(64.0 / worth(Window::hann, 1024, 64) == Approx(1.9093).epsilon(1e-4));
  CHECK(worth(Window::hann, 2048, 20000) / 10000.0 == Approx(1.895).epsilon(1e-3));
  CHECK(worth(Window::hann, 1024, 40000) / 10000.0 == Approx(2.078).epsilon(1e-3));
  CHECK(worth(Window::blackman_harris, 1024, 40000) / 10000.0 == Approx(2.805).epsilon(1e-3));
  CHECK(worth(Window::flat_top, 1024, 40000) / 10000.0 == Approx(3.98).epsilon(2e-3));
}

TEST_CASE("the worth of blocks does not depend on how their starts are held") {
  const std::vector<BlockRun> whole{{0, 24, 40}};
  const std::vector<BlockRun> cut{{0, 24, 13}, {13 * 24, 1, 1}, {14 * 24, 24, 26}};
  const auto a = spectral::averages(Window::hann, 96, whole);
  const auto b = spectral::averages(Window::hann, 96, cut);
  CHECK(a.blocks == b.blocks);
  CHECK(a.effective == Approx(b.effective).epsilon(1e-12));
  REQUIRE(a.overlaps.size() == 3);
  CHECK(a.overlaps[2].lag == Approx(0.75));
  CHECK(a.overlaps[2].pairs == 37.0);
  CHECK(b.overlaps[2].pairs == 37.0);

  std::vector<BlockRun> joined;
  for (const BlockRun& run : cut) spectral::append(joined, run);
  CHECK(joined == whole);
}
