#include "modal/frames.hpp"

#include <algorithm>
#include <utility>

namespace stillmass::modal {

std::optional<std::vector<std::vector<double>>> read_frames(recording::Reader& reader, recording::FrameRange range,
                                                            std::span<const std::size_t> channels) {
  if (range.begin < 0 || range.end > reader.recording().frames) return std::nullopt;
  std::vector<std::vector<double>> samples(channels.size());
  for (auto& channel : samples) channel.reserve(static_cast<std::size_t>(range.size()));

  recording::Chunk chunk;
  std::optional<std::size_t> segment;
  reader.seek(range.begin);
  for (std::int64_t at = range.begin; at < range.end; at = chunk.range().end) {
    const std::int64_t wanted = std::min<std::int64_t>(range.end - at, 1 << 16);
    if (!reader.next(chunk, static_cast<std::size_t>(wanted)) || chunk.first_frame != at) return std::nullopt;
    if (segment && *segment != chunk.segment) return std::nullopt;
    segment = chunk.segment;
    for (std::size_t i = 0; i < channels.size(); ++i) {
      if (!chunk.all_valid() && !chunk.is_valid(channels[i], chunk.range())) return std::nullopt;
      const auto values = std::as_const(chunk).channel(channels[i]);
      samples[i].insert(samples[i].end(), values.begin(), values.end());
    }
  }
  return samples;
}

recording::FrameRange segment_of(const recording::Recording& recording, std::int64_t frame) {
  for (const recording::Segment& segment : recording.segments) {
    const recording::FrameRange range{segment.first_frame, segment.first_frame + segment.frames};
    if (frame >= range.begin && frame < range.end) return range;
  }
  return {frame, frame};
}

}  // namespace stillmass::modal
