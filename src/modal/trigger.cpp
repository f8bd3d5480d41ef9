#include "modal/trigger.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <utility>

#include "stillmass/numeric/statistics.hpp"

#include "modal/frames.hpp"

namespace stillmass::modal {
namespace {

constexpr double hop_s = 0.02;
constexpr double of_highest_force = 0.02;
constexpr double of_highest_response = 0.10;
constexpr double over_noise = 8.0;
constexpr double over_level_before = 2.0;
constexpr double level_before_s = 0.5;
constexpr double infinity = std::numeric_limits<double>::infinity();

/// Gathers one channel.
struct Gatherer {
  struct Hop {
    std::array<double, 2> low{infinity, infinity};     // the lowest and the one above it
    std::array<double, 2> high{-infinity, -infinity};  // the highest and the one below it
    numeric::RunningMoments moments;
    bool valid = true;

    void stretch(double x) {
      if (x < low[1]) low = x < low[0] ? std::array{x, low[0]} : std::array{low[0], x};
      if (x > high[1]) high = x > high[0] ? std::array{x, high[0]} : std::array{high[0], x};
    }
  };
  std::vector<Hop> hops;

  void take(std::span<const double> samples, std::int64_t at, std::int64_t hop, const recording::Chunk& chunk,
            std::size_t channel) {
    for (std::size_t i = 0; i < samples.size();) {
      const auto h = static_cast<std::size_t>((at + static_cast<std::int64_t>(i)) / hop);
      const std::int64_t hop_end = (static_cast<std::int64_t>(h) + 1) * hop;
      const std::size_t end = std::min(samples.size(), static_cast<std::size_t>(hop_end - at));
      if (hops.size() <= h) hops.resize(h + 1);
      const auto part = samples.subspan(i, end - i);
      for (const double x : part) hops[h].stretch(x);
      hops[h].moments.add(part);
      const std::int64_t frame = chunk.first_frame + static_cast<std::int64_t>(i);
      if (!chunk.all_valid() && !chunk.is_valid(channel, {frame, frame + std::ssize(part)})) hops[h].valid = false;
      i = end;
    }
  }

  Levels levels(std::int64_t first_frame, std::int64_t hop, bool second_extremes) const {
    Levels result;
    result.first_frame = first_frame;
    result.hop = hop;
    std::vector<double> means;
    std::vector<double> deviations;
    for (const Hop& h : hops) {
      if (!h.valid || h.moments.count() < 2) continue;
      means.push_back(h.moments.mean());
      deviations.push_back(*h.moments.standard_deviation());
    }
    if (means.empty()) return result;
    result.offset = numeric::median(means);
    result.noise = numeric::quantile(deviations, 0.2);
    for (const Hop& h : hops) {
      const bool usable = h.valid && h.moments.count() > 1;
      const std::size_t which = second_extremes ? 1 : 0;
      result.low.push_back(usable ? h.low[which] : result.offset);
      result.high.push_back(usable ? h.high[which] : result.offset);
    }
    const double above = std::ranges::max(result.high) - result.offset;
    const double below = result.offset - std::ranges::min(result.low);
    result.upward = above >= below;
    result.peak = std::max(above, below);
    return result;
  }
};

/// The part of [begin, end) in the segment of its last frame.
recording::FrameRange within_segment(const recording::Recording& recording, std::int64_t begin, std::int64_t end) {
  end = std::min(end, recording.frames);
  return {std::max(begin, segment_of(recording, end - 1).begin), end};
}

}  // namespace

double Levels::distance(std::size_t h) const { return std::max(high[h] - offset, offset - low[h]); }

std::vector<Levels> measure_levels(recording::Reader& reader, recording::FrameRange range,
                                   std::span<const std::size_t> channels, bool second_extremes,
                                   const base::Context& context) {
  const auto hop = std::max<std::int64_t>(2, std::llround(hop_s * reader.recording().rate_hz));
  std::vector<Gatherer> gatherers(channels.size());
  recording::Chunk chunk;
  reader.seek(range.begin);
  for (std::int64_t at = range.begin; at < range.end; at = chunk.range().end) {
    context.check_stop();
    context.report("looking for blows", static_cast<double>(at - range.begin) / static_cast<double>(range.size()));
    const auto wanted = static_cast<std::size_t>(std::min<std::int64_t>(range.end - at, 1 << 16));
    if (!reader.next(chunk, wanted)) break;
    for (std::size_t i = 0; i < channels.size(); ++i) {
      gatherers[i].take(std::as_const(chunk).channel(channels[i]), chunk.first_frame - range.begin, hop, chunk,
                        channels[i]);
    }
  }
  std::vector<Levels> levels;
  for (const Gatherer& gatherer : gatherers) levels.push_back(gatherer.levels(range.begin, hop, second_extremes));
  return levels;
}

std::vector<std::int64_t> force_pulses(recording::Reader& reader, std::size_t channel, const Levels& levels) {
  const double threshold = std::max(of_highest_force * levels.peak, over_noise * levels.noise);
  const auto above = [&](double x) { return (levels.upward ? x - levels.offset : levels.offset - x) > threshold; };
  std::vector<std::int64_t> pulses;
  if (!(levels.peak > over_noise * levels.noise)) return pulses;
  std::int64_t last_above = levels.first_frame - levels.hop;
  for (std::size_t h = 0; h < levels.high.size(); ++h) {
    if (!above(levels.upward ? levels.high[h] : levels.low[h])) continue;
    const recording::FrameRange range =
        within_segment(reader.recording(), levels.frame(h), levels.frame(h) + levels.hop);
    const auto samples = read_frames(reader, range, std::array{channel});
    if (!samples) continue;
    for (std::size_t i = 0; i < samples->front().size(); ++i) {
      if (!above(samples->front()[i])) continue;
      const std::int64_t frame = range.begin + static_cast<std::int64_t>(i);
      if (frame - last_above > 3) pulses.push_back(frame);
      last_above = frame;
    }
  }
  return pulses;
}

std::vector<std::int64_t> response_rises(recording::Reader& reader, std::size_t channel, const Levels& levels) {
  const double threshold = std::max(of_highest_response * levels.peak, over_noise * levels.noise);
  const auto back = static_cast<std::size_t>(level_before_s / hop_s);
  std::vector<std::int64_t> rises;
  std::size_t last_rise = 0;
  for (std::size_t h = 1; h < levels.high.size(); ++h) {
    double before = 0.0;
    for (std::size_t b = h > back ? h - back : 0; b < h; ++b) before = std::max(before, levels.distance(b));
    if (levels.distance(h) <= threshold || levels.distance(h) <= over_level_before * before) continue;
    const bool same = !rises.empty() && h - last_rise <= 5;
    last_rise = h;
    if (same) continue;
    const recording::FrameRange range =
        within_segment(reader.recording(), levels.frame(h - 1), levels.frame(h) + levels.hop);
    const auto samples = read_frames(reader, range, std::array{channel});
    if (!samples) continue;
    const double start = std::max({0.1 * levels.distance(h), over_noise * levels.noise, before});
    const auto first =
        std::ranges::find_if(samples->front(), [&](double x) { return std::abs(x - levels.offset) > start; });
    rises.push_back(range.begin + (first - samples->front().begin()));
  }
  return rises;
}

}  // namespace stillmass::modal
