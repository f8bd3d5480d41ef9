#include "recording/channel_samples.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/recording/sample_quality.hpp"

namespace stillmass::recording {
namespace {

constexpr double limit_steps = 1.5;  // so close to full scale a sample counts as at the end of the range

std::int64_t flat_run_of(double rate_hz) {
  return std::max(quality_limit::flat_run, static_cast<std::int64_t>(std::ceil(quality_limit::flat_seconds * rate_hz)));
}

}  // namespace

ChannelSamples::ChannelSamples(const Channel& channel, double rate_hz, FrameRange range)
    : runs(channel.offset, flat_run_of(rate_hz)),
      levels(channel.offset),
      windows(rate_hz),
      slow_mean(range, rate_hz),
      offset_(channel.offset),
      limit_(channel.full_scale && channel.stored_step ? *channel.full_scale - limit_steps * *channel.stored_step
                                                       : std::numeric_limits<double>::infinity()) {}

void ChannelSamples::take(std::span<const double> samples, std::int64_t first_frame, std::size_t segment_place,
                          const Segment& segment, std::int64_t owned_end) {
  const std::int64_t owned = std::clamp<std::int64_t>(owned_end - first_frame, 0, std::ssize(samples));
  const auto mine = samples.first(static_cast<std::size_t>(owned));
  if (!mine.empty()) {
    moments.add(mine);
    runs.take(mine, first_frame, segment_place);
    count_at_limit(mine, first_frame);
    levels.take(mine, std::max(std::abs(moments.least - offset_), std::abs(moments.largest - offset_)));
    windows.take(mine, first_frame);
    slow_mean.take(mine, first_frame);
  }

  // Neighbours across the border of two pieces: the last samples before stay in front of the new ones.
  const bool goes_on = line_end_ == first_frame && line_segment_ == segment_place;
  const std::size_t carried = goes_on ? std::min(line_.size(), spike_window - 1) : 0;
  line_.erase(line_.begin(), line_.end() - static_cast<std::ptrdiff_t>(carried));
  line_.insert(line_.end(), samples.begin(), samples.end());
  line_end_ = first_frame + std::ssize(samples);
  line_segment_ = segment_place;
  const std::int64_t line_begin = line_end_ - std::ssize(line_);
  const std::int64_t starts = std::clamp<std::int64_t>(owned_end - line_begin, 0, std::ssize(line_));
  find_spikes(line_, static_cast<std::size_t>(starts), line_begin, line_begin == segment.first_frame,
              line_end_ == segment.first_frame + segment.frames, spikes);
  const auto pairs = static_cast<std::size_t>(std::min(starts + 1, std::ssize(line_)));
  smallest_change_seen = std::min(smallest_change_seen, smallest_change(std::span(line_).first(pairs)));
  // As many as there are windows of a spike, so that none is counted again with the next piece.
  const std::int64_t last_start = std::min(starts, std::ssize(line_) - static_cast<std::int64_t>(spike_window) + 1);
  for (std::int64_t i = 0; i < last_start; ++i) {
    const double* const x = line_.data() + i;
    if (is_edge(x[0], x[1], x[2], x[3])) levels.take_edge(x[1], line_begin + i + 1);
    if (is_edge(x[0], x[2], x[4], x[6])) levels.take_edge(x[2], line_begin + i + 2);
  }
}

void ChannelSamples::count_at_limit(std::span<const double> samples, std::int64_t first_frame) {
  if (!std::isfinite(limit_)) return;
  if (std::max(std::abs(moments.least - offset_), std::abs(moments.largest - offset_)) < limit_) return;
  for (std::size_t i = 0; i < samples.size(); ++i) {
    if (std::abs(samples[i] - offset_) < limit_) continue;
    last_at_limit = first_frame + static_cast<std::int64_t>(i);
    if (!first_at_limit) first_at_limit = last_at_limit;
    ++at_limit;
  }
}

void ChannelSamples::add_missing(std::int64_t samples, std::int64_t first_frame) {
  if (samples <= 0) return;
  if (!first_missing) first_missing = first_frame;
  last_missing = first_frame + samples - 1;
  missing += samples;
}

void ChannelSamples::merge(const ChannelSamples& later) {
  moments.merge(later.moments);
  if (later.first_missing) add_missing(later.missing, *later.first_missing);
  if (later.first_missing) last_missing = later.last_missing;
  if (later.first_at_limit) {
    if (!first_at_limit) first_at_limit = later.first_at_limit;
    last_at_limit = later.last_at_limit;
  }
  at_limit += later.at_limit;
  smallest_change_seen = std::min(smallest_change_seen, later.smallest_change_seen);
  runs.append(later.runs);
  spikes.append(later.spikes);
  levels.merge(later.levels);
  windows.merge(later.windows);
  slow_mean.merge(later.slow_mean);
}

}  // namespace stillmass::recording
