#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <utility>
#include <vector>

#include "stillmass/recording/reader.hpp"

namespace stillmass::tests {

/// A channel of a MemoryReader: SI samples, NaN where one is missing.
struct MemoryChannel {
  std::string name;
  std::vector<double> samples;
  base::Quantity quantity = base::Quantity::acceleration;
  recording::Role role = recording::Role::vibration;
  std::optional<double> stored_step{};  ///< of a recorder of so many bits; SI
  std::optional<double> full_scale{};
  bool unit_known = true;
};

/// A recording in memory, served as a file would be: chunks never cross a segment, missing samples are held as 0 and
/// left out of the valid ranges. `chunk_frames` makes chunks shorter than what is asked for.
class MemoryReader final : public recording::Reader {
 public:
  /// All channels of one length. Without segments the recording is one; with them they cover it in order.
  MemoryReader(double rate_hz, std::vector<MemoryChannel> channels, std::vector<recording::Segment> segments = {},
               std::size_t chunk_frames = std::size_t{1} << 30)
      : channels_(std::make_shared<const std::vector<MemoryChannel>>(std::move(channels))), longest_(chunk_frames) {
    auto description = std::make_shared<recording::Recording>();
    description->file = "memory";
    description->format = "memory";
    description->rate_hz = rate_hz;
    description->frames = static_cast<std::int64_t>(channels_->front().samples.size());
    for (const MemoryChannel& channel : *channels_) {
      recording::Channel c;
      c.index = static_cast<int>(description->channels.size()) + 1;
      c.name = channel.name;
      c.role = channel.role;
      c.unit = base::si_unit(channel.quantity);
      c.point = channel.name;
      c.unit_known = channel.unit_known;
      c.stored_step = channel.stored_step;
      c.full_scale = channel.full_scale;
      description->channels.push_back(std::move(c));
    }
    if (segments.empty()) segments.push_back({0, description->frames, 0.0});
    description->segments = std::move(segments);
    recording_ = std::move(description);
  }

  void seek(std::int64_t frame) override { position_ = frame; }

  bool next(recording::Chunk& chunk, std::size_t max_frames) override {
    const auto& segments = recording_->segments;
    const auto segment = std::find_if(segments.begin(), segments.end(), [&](const recording::Segment& s) {
      return position_ < s.first_frame + s.frames;
    });
    if (segment == segments.end()) return false;
    const auto left = static_cast<std::size_t>(segment->first_frame + segment->frames - position_);
    chunk.resize(channels_->size(), std::min({left, max_frames, longest_}));
    chunk.segment = static_cast<std::size_t>(segment - segments.begin());
    chunk.first_frame = position_;
    chunk.valid.clear();
    bool all_valid = true;
    for (std::size_t c = 0; c < channels_->size(); ++c) {
      const double* from = (*channels_)[c].samples.data() + position_;
      const auto to = chunk.channel(c);
      std::vector<recording::FrameRange> valid;
      for (std::size_t i = 0; i < to.size(); ++i) {
        const bool is_there = !std::isnan(from[i]);
        to[i] = is_there ? from[i] : 0.0;
        if (!is_there) {
          all_valid = false;
          continue;
        }
        const std::int64_t frame = position_ + static_cast<std::int64_t>(i);
        if (valid.empty() || valid.back().end != frame) valid.push_back({frame, frame});
        ++valid.back().end;
      }
      chunk.valid.push_back(std::move(valid));
    }
    if (all_valid) chunk.valid.clear();
    position_ += static_cast<std::int64_t>(chunk.frames);
    return true;
  }

  std::unique_ptr<recording::Reader> second() const override {
    auto copy = std::make_unique<MemoryReader>(*this);
    copy->position_ = 0;
    return copy;
  }

 private:
  std::shared_ptr<const std::vector<MemoryChannel>> channels_;
  std::size_t longest_;
  std::int64_t position_ = 0;
};

/// All frames of a recording.
inline recording::FrameRange all_frames(const recording::Reader& reader) { return {0, reader.recording().frames}; }

}  // namespace stillmass::tests
