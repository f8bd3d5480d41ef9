#include "stillmass/recording/time_features.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>
#include <limits>
#include <span>

#include "stillmass/numeric/statistics.hpp"

#include "recording/flat_top.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t at_once = 1024;  // samples looked at together; they stay in the cache
constexpr double limit_steps = 1.5;    // so close to full scale a sample counts as at the end of the range

// What is gathered of one channel over a range of frames.
class Features {
 public:
  explicit Features(const Channel& channel)
      : offset_(channel.offset),
        knows_limit_(channel.full_scale.has_value()),
        limit_(channel.full_scale ? *channel.full_scale - limit_steps * channel.stored_step.value_or(0.0)
                                  : std::numeric_limits<double>::infinity()) {}

  // Valid samples in a row, of one segment.
  void take(std::span<const double> samples, std::int64_t first_frame, std::size_t segment) {
    for (std::size_t at = 0; at < samples.size(); at += at_once) {
      const auto part = samples.subspan(at, std::min(at_once, samples.size() - at));
      take_part(part, first_frame + static_cast<std::int64_t>(at), segment);
    }
  }

  void merge(const Features& later) {
    if (later.moments_.count() == 0) return;
    const bool adjacent = moments_.count() > 0 && later.begin_ == end_ && later.first_segment_ == last_segment_;
    top_.append(later.top_, adjacent);
    bottom_.append(later.bottom_, adjacent);
    if (moments_.count() == 0) {
      begin_ = later.begin_;
      first_segment_ = later.first_segment_;
    }
    end_ = later.end_;
    last_segment_ = later.last_segment_;
    moments_.merge(later.moments_);
    at_limit_ += later.at_limit_;
  }

  ChannelFeatures result(const Channel& channel) const {
    ChannelFeatures out;
    out.channel = channel.name;
    out.quantity = channel.unit.quantity;
    out.samples = static_cast<std::int64_t>(moments_.count());
    if (out.samples == 0) return out;
    const auto n = static_cast<double>(moments_.count());
    out.mean = moments_.mean();
    out.rms = moments_.rms();
    out.deviation = std::sqrt(moments_.variance().value_or(0.0) * (n - 1.0) / n);
    out.peak = std::max(top_.value - *out.mean, bottom_.value + *out.mean);
    if (top_.value + bottom_.value > 0.0) {  // something varies
      if (*out.deviation > 0.0) out.crest_factor = *out.peak / *out.deviation;
      out.kurtosis = moments_.kurtosis();
    }
    if (knows_limit_) out.at_full_scale = at_limit_;
    out.flat_top = std::max(top_.longest, bottom_.longest);
    return out;
  }

 private:
  void take_part(std::span<const double> part, std::int64_t first_frame, std::size_t segment) {
    const bool adjacent = moments_.count() > 0 && first_frame == end_ && segment == last_segment_;
    const auto [least, greatest] = numeric::extremes(part);
    extend(top_, part, 1.0, greatest, adjacent);
    extend(bottom_, part, -1.0, -least, adjacent);
    if (std::max(greatest - offset_, offset_ - least) >= limit_) {
      at_limit_ += std::count_if(part.begin(), part.end(), [&](double x) { return std::abs(x - offset_) >= limit_; });
    }
    if (moments_.count() == 0) {
      begin_ = first_frame;
      first_segment_ = segment;
    }
    moments_.add(part);
    end_ = first_frame + std::ssize(part);
    last_segment_ = segment;
  }

  // Most parts stay below the extreme of the parts before: those are not looked at again.
  static void extend(FlatTop& top, std::span<const double> part, double sign, double greatest, bool adjacent) {
    if (top.count > 0 && greatest < top.value) {
      top.count += std::ssize(part);
      top.tail = 0;
    } else {
      top.append(FlatTop::of(part, sign, greatest), adjacent);
    }
  }

  double offset_;
  bool knows_limit_;
  double limit_;  // of the distance from the offset
  numeric::RunningMoments moments_;
  FlatTop top_;
  FlatTop bottom_;  // of the mirrored signal
  std::int64_t at_limit_ = 0;
  std::int64_t begin_ = 0;
  std::int64_t end_ = 0;
  std::size_t first_segment_ = 0;
  std::size_t last_segment_ = 0;
};

}  // namespace

struct TimeFeatures::State {
  const Recording* recording = nullptr;
  FrameRange owned;
  std::vector<Features> channels;
};

TimeFeatures::TimeFeatures(const Recording& recording) : state_(std::make_unique<State>()) {
  state_->recording = &recording;
  state_->owned = {0, recording.frames};
  for (const Channel& channel : recording.channels) state_->channels.emplace_back(channel);
}

TimeFeatures::~TimeFeatures() = default;

std::unique_ptr<Consumer> TimeFeatures::fresh(FrameRange owned) const {
  auto partial = std::make_unique<TimeFeatures>(*state_->recording);
  partial->state_->owned = owned;
  return partial;
}

void TimeFeatures::take(const Chunk& chunk) {
  const FrameRange wanted{std::max(chunk.range().begin, state_->owned.begin),
                          std::min(chunk.range().end, state_->owned.end)};
  for (std::size_t c = 0; c < state_->channels.size(); ++c) {
    const auto samples = chunk.channel(c);
    const auto give = [&](FrameRange valid) {
      const FrameRange part{std::max(valid.begin, wanted.begin), std::min(valid.end, wanted.end)};
      if (part.size() == 0) return;
      state_->channels[c].take(samples.subspan(static_cast<std::size_t>(part.begin - chunk.first_frame),
                                               static_cast<std::size_t>(part.size())),
                               part.begin, chunk.segment);
    };
    if (chunk.all_valid()) {
      give(wanted);
    } else {
      std::for_each(chunk.valid[c].begin(), chunk.valid[c].end(), give);
    }
  }
}

void TimeFeatures::merge(Consumer& next) {
  const auto& other = dynamic_cast<TimeFeatures&>(next);
  for (std::size_t c = 0; c < state_->channels.size(); ++c) state_->channels[c].merge(other.state_->channels[c]);
}

std::vector<ChannelFeatures> TimeFeatures::result() const {
  std::vector<ChannelFeatures> all;
  for (std::size_t c = 0; c < state_->channels.size(); ++c) {
    all.push_back(state_->channels[c].result(state_->recording->channels[c]));
  }
  return all;
}

std::vector<ChannelFeatures> time_features(const Reader& reader, FrameRange range, const base::Context& context) {
  TimeFeatures features(reader.recording());
  const std::array<Consumer*, 1> consumers{&features};
  run_pass(reader, range, consumers, context, "time features");
  return features.result();
}

}  // namespace stillmass::recording
