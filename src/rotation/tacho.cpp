#include "stillmass/rotation/tacho.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/statistics.hpp"

namespace stillmass::rotation {
namespace {

using recording::Chunk;
using recording::FrameRange;
using recording::Reader;

constexpr std::size_t chunk_frames = 1 << 16;

// Hands the valid stretches of one channel to `take(first_frame, samples)`, in order.
template <class Take>
void for_valid_samples(const Reader& reader, FrameRange range, std::size_t channel, const base::Context& context,
                       Take take) {
  const auto handle = reader.second();
  handle->seek(range.begin);
  Chunk chunk;
  for (std::int64_t frame = range.begin; frame < range.end; frame = chunk.range().end) {
    context.check_stop();
    const auto wanted = std::min<std::int64_t>(chunk_frames, range.end - frame);
    if (!handle->next(chunk, static_cast<std::size_t>(wanted))) return;
    const auto samples = chunk.channel(channel);
    if (chunk.all_valid()) {
      take(chunk.first_frame, samples);
      continue;
    }
    for (const FrameRange& good : chunk.valid[channel]) {
      take(good.begin, samples.subspan(static_cast<std::size_t>(good.begin - chunk.first_frame),
                                       static_cast<std::size_t>(good.size())));
    }
  }
}

struct Levels {
  double middle = 0.0;
  double height = 0.0;
};

// Middle and height of the pulses: the signal's least and greatest value in every half second; of those that swing at
// least half as far as most (90 %) the median. Pauses between pulses and single spikes do not count.
Levels pulse_levels(const Reader& reader, FrameRange range, std::size_t channel, const base::Context& context) {
  const auto block = std::max<std::int64_t>(1, std::llround(0.5 * reader.recording().rate_hz));
  std::vector<double> swing;
  std::vector<double> middle;
  std::int64_t current = -1;
  double lowest = 0.0;
  double highest = 0.0;
  const auto close = [&] {
    if (current < 0) return;
    swing.push_back(highest - lowest);
    middle.push_back(0.5 * (highest + lowest));
  };
  for_valid_samples(reader, range, channel, context, [&](std::int64_t first, std::span<const double> samples) {
    for (std::size_t i = 0; i < samples.size();) {
      const std::int64_t frame = first + static_cast<std::int64_t>(i);
      const std::int64_t number = frame / block;
      if (number != current) {
        close();
        current = number;
        lowest = highest = samples[i];
      }
      const std::size_t end = std::min(samples.size(), i + static_cast<std::size_t>((number + 1) * block - frame));
      for (; i < end; ++i) {
        lowest = std::min(lowest, samples[i]);
        highest = std::max(highest, samples[i]);
      }
    }
  });
  close();
  if (swing.empty()) return {};
  const double enough = 0.5 * numeric::quantile(swing, 0.9);
  std::vector<double> strong_swing;
  std::vector<double> strong_middle;
  for (std::size_t i = 0; i < swing.size(); ++i) {
    if (swing[i] < enough) continue;
    strong_swing.push_back(swing[i]);
    strong_middle.push_back(middle[i]);
  }
  return {numeric::median(strong_middle), numeric::median(strong_swing)};
}

// Finds the edges in a stream: armed below the band, an edge counts once the signal is above it.
class EdgeFinder {
 public:
  EdgeFinder(double threshold, double hysteresis, Edge edge)
      : sign_(edge == Edge::rising ? 1.0 : -1.0), level_(sign_ * threshold), half_(0.5 * hysteresis) {}

  /// Positions, in frames, are added to `found`.
  void take(std::int64_t first, std::span<const double> samples, std::vector<double>& found) {
    if (first != next_frame_) {  // samples are missing in between
      armed_ = false;
      previous_ = level_ + half_;
    }
    for (std::size_t i = 0; i < samples.size(); ++i) {
      const double sample = sign_ * samples[i];
      if (sample <= level_ - half_) armed_ = true;
      if (previous_ < level_ && sample >= level_) {
        const double back = (sample - level_) / (sample - previous_);
        crossing_ = static_cast<double>(first) + static_cast<double>(i) - back;
      }
      if (armed_ && sample >= level_ + half_) {
        found.push_back(crossing_);
        armed_ = false;
      }
      previous_ = sample;
    }
    next_frame_ = first + static_cast<std::int64_t>(samples.size());
  }

 private:
  double sign_;
  double level_;
  double half_;
  double previous_ = 0.0;
  double crossing_ = 0.0;
  bool armed_ = false;
  std::int64_t next_frame_ = -1;
};

base::Refusal no_pulses(std::string seen) {
  return {"no-pulses", std::move(seen),
          "check the tacho's mark, distance and channel, then record again; or give the threshold"};
}

}  // namespace

std::string_view name(Edge edge) { return edge == Edge::rising ? "rising" : "falling"; }

base::Answer<Pulses> find_pulses(const Reader& reader, FrameRange range, const TachoOptions& options,
                                 const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  if (options.channel >= recording.channels.size()) {
    throw base::usage_error("tacho", fmt::format("there is no channel {}", options.channel + 1));
  }
  if (options.pulses_per_turn < 1) throw base::usage_error("pulses per turn", "must be at least 1");

  double threshold = options.threshold.value_or(0.0);
  double hysteresis = options.hysteresis.value_or(0.0);
  if (!options.threshold || !options.hysteresis) {
    const Levels levels = pulse_levels(reader, range, options.channel, context);
    if (!(levels.height > 0.0)) {
      return no_pulses(fmt::format("channel {} stays at one value", recording.channels[options.channel].name));
    }
    if (!options.threshold) threshold = levels.middle;
    if (!options.hysteresis) hysteresis = 0.3 * levels.height;
  }

  std::vector<double> edges;
  EdgeFinder finder(threshold, hysteresis, options.edge);
  for_valid_samples(reader, range, options.channel, context,
                    [&](std::int64_t first, std::span<const double> samples) { finder.take(first, samples, edges); });
  const double start_s = recording.time_s(range.begin);
  for (double& edge : edges) edge = start_s + (edge - static_cast<double>(range.begin)) / recording.rate_hz;

  base::Answer<Pulses> answer = repaired_pulses(edges, options.pulses_per_turn);
  if (!answer) return answer;
  Pulses& pulses = answer.value();
  pulses.edge = options.edge;
  pulses.threshold = threshold;
  pulses.hysteresis = hysteresis;
  // No crossing is known better than to a hundredth of a sample, however even the pulses come.
  if (pulses.time_u) pulses.time_u = std::max(*pulses.time_u, 0.01 / recording.rate_hz);
  for (base::Finding& finding : pulses.findings) finding.channel = recording.channels[options.channel].name;
  return answer;
}

}  // namespace stillmass::rotation
