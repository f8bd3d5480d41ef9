#include "stillmass/spectral/block_plan.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;
using recording::Segment;

FrameRange part_of(const Segment& segment, FrameRange range) {
  return {std::max(segment.first_frame, range.begin), std::min(segment.first_frame + segment.frames, range.end)};
}

std::int64_t hop_of(std::size_t length, double overlap) {
  if (!(overlap >= 0.0 && overlap <= 0.95)) {
    throw base::usage_error({}, fmt::format("an overlap of {}", overlap), "the overlap is a fraction, 0 to 0.95");
  }
  // 1e-9: an overlap such as 0.7 of 10 frames is meant to be 7, whatever its last bit.
  const auto shared = static_cast<std::int64_t>(std::floor(overlap * static_cast<double>(length) + 1e-9));
  return static_cast<std::int64_t>(length) - shared;
}

std::int64_t blocks_in(std::int64_t frames, std::size_t length, std::int64_t hop) {
  const auto n = static_cast<std::int64_t>(length);
  return frames < n ? 0 : 1 + (frames - n) / hop;
}

bool is_fast(std::size_t n) {
  for (const std::size_t factor : {2, 3, 5}) {
    while (n % factor == 0) n /= factor;
  }
  return n == 1;
}

base::Error no_block(const Recording& recording, FrameRange range, double block_s) {
  return base::usage_error(
      recording.file.string(),
      fmt::format("no gapless part of the {:.3g} s to analyse holds a block of {:.3g} s (lines {:.3g} Hz apart)",
                  static_cast<double>(range.size()) / recording.rate_hz, block_s, 1.0 / block_s),
      "ask for a coarser resolution or record longer");
}

}  // namespace

void append(std::vector<BlockRun>& runs, BlockRun run) {
  if (run.count <= 0) return;
  if (!runs.empty()) {
    BlockRun& before = runs.back();
    const std::int64_t distance = run.first - before.last();
    const bool goes_on = (before.count == 1 || before.hop == distance) && (run.count == 1 || run.hop == distance);
    if (goes_on) {
      before.hop = distance;
      before.count += run.count;
      return;
    }
  }
  runs.push_back(run);
}

BlockPlan BlockPlan::overlapping(const Recording& recording, FrameRange range, std::size_t length, double overlap) {
  if (length == 0) throw base::usage_error({}, "a block of no frames");
  const std::int64_t hop = hop_of(length, overlap);
  BlockPlan plan;
  plan.length_ = length;
  for (const Segment& segment : recording.segments) {
    const FrameRange part = part_of(segment, range);
    const std::int64_t count = blocks_in(part.size(), length, hop);
    if (count > 0) plan.runs_.push_back({part.begin, hop, count});
  }
  if (plan.runs_.empty()) throw no_block(recording, range, static_cast<double>(length) / recording.rate_hz);
  return plan;
}

BlockPlan BlockPlan::triggered(const Recording& recording, FrameRange range, std::span<const std::int64_t> starts,
                               std::size_t length) {
  if (length == 0) throw base::usage_error({}, "a block of no frames");
  if (std::adjacent_find(starts.begin(), starts.end(), std::greater_equal<>()) != starts.end()) {
    throw base::usage_error({}, "starts of blocks that do not ascend");
  }
  BlockPlan plan;
  plan.length_ = length;
  auto segment = recording.segments.begin();
  for (const std::int64_t start : starts) {
    while (segment != recording.segments.end() && segment->first_frame + segment->frames <= start) ++segment;
    if (segment == recording.segments.end()) break;
    const FrameRange part = part_of(*segment, range);
    if (start >= part.begin && start + static_cast<std::int64_t>(length) <= part.end) append(plan.runs_, {start, 1, 1});
  }
  return plan;
}

std::int64_t BlockPlan::blocks() const {
  return std::accumulate(runs_.begin(), runs_.end(), std::int64_t{0},
                         [](std::int64_t sum, const BlockRun& run) { return sum + run.count; });
}

BlockPlan BlockPlan::starting_in(FrameRange range) const {
  BlockPlan part;
  part.length_ = length_;
  for (const BlockRun& run : runs_) {
    const auto before = [&](std::int64_t frame) {  // blocks of the run that start before the frame
      return std::clamp<std::int64_t>(frame <= run.first ? 0 : 1 + (frame - 1 - run.first) / run.hop, 0, run.count);
    };
    const std::int64_t from = before(range.begin);
    const std::int64_t to = before(range.end);
    if (to > from) part.runs_.push_back({run.start(from), run.hop, to - from});
  }
  return part;
}

std::int64_t count_blocks(const Recording& recording, FrameRange range, std::size_t length, double overlap) {
  const std::int64_t hop = hop_of(length, overlap);
  std::int64_t count = 0;
  for (const Segment& segment : recording.segments) count += blocks_in(part_of(segment, range).size(), length, hop);
  return count;
}

std::size_t fast_length_at_least(std::size_t n) {
  n = std::max<std::size_t>(n, 1);
  while (!is_fast(n)) ++n;
  return n;
}

std::size_t fast_length_at_most(std::size_t n) {
  n = std::max<std::size_t>(n, 1);
  while (!is_fast(n)) --n;
  return n;
}

std::size_t block_length(const Recording& recording, FrameRange range, double resolution_hz, double overlap) {
  constexpr double finest_hz = 0.25;
  constexpr double coarsest_hz = 1.0;
  constexpr std::int64_t blocks_to_refine = 64;
  constexpr std::size_t least_frames = 16;

  const auto count = [&](std::size_t length) { return count_blocks(recording, range, length, overlap); };
  const double rate = recording.rate_hz;
  if (resolution_hz != 0.0) {
    if (!(resolution_hz > 0.0 && resolution_hz <= rate / 2)) {
      throw base::usage_error(recording.file.string(), fmt::format("a resolution of {} Hz", resolution_hz),
                              fmt::format("lines can be up to {:.6g} Hz apart", rate / 2));
    }
    const double wanted = std::ceil(rate / resolution_hz - 1e-9);
    if (wanted > static_cast<double>(range.size())) throw no_block(recording, range, 1.0 / resolution_hz);
    const std::size_t length = fast_length_at_least(static_cast<std::size_t>(wanted));
    if (count(length) < 1) throw no_block(recording, range, static_cast<double>(length) / rate);
    return length;
  }

  // No block is longer than the longest part, whatever rate a header states: the search begins there.
  std::int64_t longest = static_cast<std::int64_t>(least_frames);
  for (const Segment& segment : recording.segments) longest = std::max(longest, part_of(segment, range).size());
  const auto at_most_longest = [&](double frames) {
    return static_cast<std::size_t>(std::min(frames, static_cast<double>(longest)));
  };
  const std::size_t shortest = fast_length_at_least(at_most_longest(std::ceil(rate / coarsest_hz)));
  // Every channel holds a block and its sums: many channels at a high rate get coarser lines, never coarser than 1 Hz.
  const double held = held_samples / static_cast<double>(std::max<std::size_t>(1, recording.channels.size()));
  std::size_t length =
      fast_length_at_most(at_most_longest(std::min(rate / finest_hz, std::max(rate / coarsest_hz, held))));
  while (length > shortest && count(length) < blocks_to_refine) length = fast_length_at_most(length - 1);
  while (length > least_frames && count(length) < least_blocks) length = fast_length_at_most(length - 1);
  if (count(length) < 1) throw no_block(recording, range, static_cast<double>(length) / rate);
  return length;
}

}  // namespace stillmass::spectral
