#include "stillmass/recording/sample_quality.hpp"

#include <algorithm>
#include <array>

#include "recording/channel_samples.hpp"
#include "recording/sample_verdict.hpp"

namespace stillmass::recording {

struct SampleQuality::State {
  const Recording* recording = nullptr;
  FrameRange range;  // of the whole pass
  FrameRange owned;
  std::vector<ChannelSamples> channels;
};

SampleQuality::SampleQuality(const Recording& recording, std::optional<FrameRange> range)
    : state_(std::make_unique<State>()) {
  state_->recording = &recording;
  state_->range = range.value_or(FrameRange{0, recording.frames});
  state_->owned = state_->range;
  for (const Channel& channel : recording.channels) {
    state_->channels.emplace_back(channel, recording.rate_hz, state_->range);
  }
}

SampleQuality::~SampleQuality() = default;

std::int64_t SampleQuality::lookahead() const { return static_cast<std::int64_t>(spike_window) - 1; }

std::unique_ptr<Consumer> SampleQuality::fresh(FrameRange owned) const {
  auto partial = std::make_unique<SampleQuality>(*state_->recording, state_->range);
  partial->state_->owned = owned;
  return partial;
}

void SampleQuality::take(const Chunk& chunk) {
  const Segment& segment = state_->recording->segments[chunk.segment];
  const std::int64_t owned_end = std::min(chunk.range().end, state_->owned.end);
  const std::vector<FrameRange> whole{chunk.range()};
  for (std::size_t c = 0; c < state_->channels.size(); ++c) {
    ChannelSamples& channel = state_->channels[c];
    std::int64_t at = chunk.first_frame;
    for (const FrameRange& valid : chunk.all_valid() ? whole : chunk.valid[c]) {
      channel.add_missing(std::min(valid.begin, owned_end) - at, at);
      const auto first = static_cast<std::size_t>(valid.begin - chunk.first_frame);
      channel.take(chunk.channel(c).subspan(first, static_cast<std::size_t>(valid.size())), valid.begin, chunk.segment,
                   segment, state_->owned.end);
      at = valid.end;
    }
    channel.add_missing(owned_end - at, at);
  }
}

void SampleQuality::merge(Consumer& next) {
  const auto& other = dynamic_cast<SampleQuality&>(next);
  for (std::size_t c = 0; c < state_->channels.size(); ++c) state_->channels[c].merge(other.state_->channels[c]);
}

std::vector<ChannelQuality> SampleQuality::result() const {
  std::vector<ChannelQuality> result;
  for (std::size_t c = 0; c < state_->channels.size(); ++c) {
    result.push_back(judge_channel(*state_->recording, state_->recording->channels[c], state_->channels[c]));
  }
  return result;
}

std::vector<ChannelQuality> sample_quality(const Reader& reader, FrameRange range, const base::Context& context) {
  SampleQuality quality(reader.recording(), range);
  const std::array<Consumer*, 1> consumers{&quality};
  run_pass(reader, range, consumers, context, "looking at the samples");
  return quality.result();
}

}  // namespace stillmass::recording
