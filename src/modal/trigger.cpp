#include "modal/trigger.hpp"

#include <algorithm>
#include <array>
#include <cmath>
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

/// Gathers one channel.
struct Gatherer {
  struct Hop {
    double low = 0.0;
    double high = 0.0;
    numeric::RunningMoments moments;
    bool valid = true;
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
      const auto [low, high] = std::ranges::minmax(part);
      const bool first = hops[h].moments.count() == 0;
      hops[h].low = first ? low : std::min(hops[h].low, low);
      hops[h].high = first ? high : std::max(hops[h].high, high);
      hops[h].moments.add(part);
      const std::int64_t frame = chunk.first_frame + static_cast<std::int64_t>(i);
      if (!chunk.all_valid() && !chunk.is_valid(channel, {frame, frame + std::ssize(part)})) hops[h].valid = false;
      i = end;
    }
  }

  Levels levels(std::int64_t first_frame, std::int64_t hop) const {
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
      const bool usable = h.valid && h.moments.count() > 0;
      result.low.push_back(usable ? h.low : result.offset);
      result.high.push_back(usable ? h.high : result.offset);
    }
    const double above = std::ranges::max(result.high) - result.offset;
    const double below = result.offset - std::ranges::min(result.low);
    result.upward = above >= below;
    result.peak = std::max(above, below);
    return result;
  }
};

}  // namespace

double Levels::distance(std::size_t h) const { return std::max(high[h] - offset, offset - low[h]); }

std::vector<Levels> measure_levels(recording::Reader& reader, recording::FrameRange range,
                                   std::span<const std::size_t> channels, const base::Context& context) {
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
  for (const Gatherer& gatherer : gatherers) levels.push_back(gatherer.levels(range.begin, hop));
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
    const std::int64_t end = std::min(levels.frame(h) + levels.hop, reader.recording().frames);
    const auto samples = read_frames(reader, {levels.frame(h), end}, std::array{channel});
    if (!samples) continue;
    for (std::size_t i = 0; i < samples->front().size(); ++i) {
      if (!above(samples->front()[i])) continue;
      const std::int64_t frame = levels.frame(h) + static_cast<std::int64_t>(i);
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
    const std::int64_t end = std::min(levels.frame(h) + levels.hop, reader.recording().frames);
    const auto samples = read_frames(reader, {levels.frame(h - 1), end}, std::array{channel});
    if (!samples) continue;
    const double start = std::max({0.1 * levels.distance(h), over_noise * levels.noise, before});
    const auto first =
        std::ranges::find_if(samples->front(), [&](double x) { return std::abs(x - levels.offset) > start; });
    rises.push_back(levels.frame(h - 1) + (first - samples->front().begin()));
  }
  return rises;
}

}  // namespace stillmass::modal
