#pragma once

#include <cstdint>
#include <limits>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/recording/recording.hpp"

#include "recording/level_counts.hpp"
#include "recording/moments.hpp"
#include "recording/runs.hpp"
#include "recording/slow_mean.hpp"
#include "recording/spikes.hpp"
#include "recording/window_spans.hpp"

namespace stillmass::recording {

/// What is gathered of the samples of one channel over a range of frames; ranges that follow each other can be merged.
class ChannelSamples {
 public:
  /// range: the frames of the whole pass.
  ChannelSamples(const Channel& channel, double rate_hz, FrameRange range);

  /// Valid samples, consecutive, of one segment; those from `owned_end` on are only looked at as neighbours.
  void take(std::span<const double> samples, std::int64_t first_frame, std::size_t segment_place,
            const Segment& segment, std::int64_t owned_end);
  void add_missing(std::int64_t samples, std::int64_t first_frame);
  void merge(const ChannelSamples& later);

  Moments moments;
  std::int64_t missing = 0;
  std::optional<std::int64_t> first_missing;
  std::int64_t last_missing = 0;
  std::int64_t at_limit = 0;  ///< samples at the end of the recorder's range
  std::optional<std::int64_t> first_at_limit;
  std::int64_t last_at_limit = 0;
  double smallest_change_seen = std::numeric_limits<double>::infinity();
  RunChain runs;
  SpikeList spikes;
  LevelCounts levels;
  WindowSpans windows;
  SlowMean slow_mean;

 private:
  void count_at_limit(std::span<const double> samples, std::int64_t first_frame);

  double offset_;
  double limit_;              // of the distance from the offset
  std::vector<double> line_;  // the last samples taken, and those being taken
  std::int64_t line_end_ = -1;
  std::size_t line_segment_ = 0;
};

}  // namespace stillmass::recording
