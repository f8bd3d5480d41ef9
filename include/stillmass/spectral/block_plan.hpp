#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/recording/recording.hpp"

namespace stillmass::spectral {

/// Blocks at equal distances: block i starts at frame first + i * hop.
struct BlockRun {
  std::int64_t first = 0;
  std::int64_t hop = 1;
  std::int64_t count = 0;

  std::int64_t start(std::int64_t i) const { return first + i * hop; }
  std::int64_t last() const { return start(count - 1); }
  bool operator==(const BlockRun&) const = default;
};

/// Adds a run behind the others, joined to the last one where it goes on at the same distance.
void append(std::vector<BlockRun>& runs, BlockRun run);

/// Where the blocks of an analysis start, all of one length, each within one segment. It holds runs, not blocks, so a
/// plan for a day of samples is as small as one for a minute.
class BlockPlan {
 public:
  /// Blocks one behind the other, each sharing floor(overlap * length) frames with the next, from the start of each
  /// segment's part of `range`. Throws `Error` (usage): length 0 or no block fits; overlap outside 0 to 0.95.
  static BlockPlan overlapping(const recording::Recording& recording, recording::FrameRange range, std::size_t length,
                               double overlap);
  /// One block [start, start + length) for each start; a block that leaves `range` or its segment is left out. The
  /// starts must ascend. Throws `Error` (usage): length 0, starts that do not ascend.
  static BlockPlan triggered(const recording::Recording& recording, recording::FrameRange range,
                             std::span<const std::int64_t> starts, std::size_t length);

  std::size_t length() const { return length_; }
  std::span<const BlockRun> runs() const { return runs_; }
  std::int64_t blocks() const;
  /// The blocks that start within the range.
  BlockPlan starting_in(recording::FrameRange range) const;

 private:
  std::size_t length_ = 0;
  std::vector<BlockRun> runs_;
};

/// How many blocks of that length and overlap fit into the range without crossing a gap.
std::int64_t count_blocks(const recording::Recording& recording, recording::FrameRange range, std::size_t length,
                          double overlap);

/// Smallest 2^a 3^b 5^c that is at least n, greatest that is at most n (n >= 1): lengths that transform fast.
std::size_t fast_length_at_least(std::size_t n);
std::size_t fast_length_at_most(std::size_t n);

/// Samples of all channels in one block, at most, where the program chooses its length: keeps a long recording's memory
/// under 60 MB.
inline constexpr double held_samples = 3 << 17;
/// Blocks that remain, at least, where the program chooses their length (common practice: 16 averages hold a line
/// within 25 %).
inline constexpr std::int64_t least_blocks = 16;

/// Block length for lines at most `resolution_hz` apart: the shortest fast length that gives it.
/// With `resolution_hz` 0 it is chosen: lines 0.25 to 1 Hz apart, as fine as 64 blocks allow, coarser only where fewer
/// than 16 blocks would remain (common practice: 16 averages hold a line within 25 %), and never finer than 400 000
/// samples of all channels in a block allow.
/// Throws `Error` (usage) where no segment of the range holds one block of it.
std::size_t block_length(const recording::Recording& recording, recording::FrameRange range, double resolution_hz,
                         double overlap);

}  // namespace stillmass::spectral
