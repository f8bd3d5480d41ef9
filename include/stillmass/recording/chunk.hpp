#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/recording/recording.hpp"

namespace stillmass::recording {

/// Consecutive calibrated samples of all channels: planar, SI, of one segment (a gap is never inside a chunk).
/// Frames are counted over the whole recording. A sample outside its channel's valid ranges (a missing cell, a NaN) is
/// held as 0 and must not be used.
class Chunk {
 public:
  std::size_t segment = 0;
  std::int64_t first_frame = 0;
  std::size_t frames = 0;
  /// Per channel, ascending, disjoint, not empty, in frames of the recording. Where every sample of every channel is
  /// valid, the list is empty.
  std::vector<std::vector<FrameRange>> valid;

  FrameRange range() const { return {first_frame, first_frame + static_cast<std::int64_t>(frames)}; }
  std::size_t channels() const { return capacity_ == 0 ? 0 : samples_.size() / capacity_; }
  std::span<const double> channel(std::size_t c) const { return {samples_.data() + c * capacity_, frames}; }
  std::span<double> channel(std::size_t c) { return {samples_.data() + c * capacity_, frames}; }
  /// Room for that many channels and frames; contents undefined, `frames` = count.
  void resize(std::size_t channel_count, std::size_t count);
  bool all_valid() const { return valid.empty(); }
  /// True where every sample of channel c in the range is valid.
  bool is_valid(std::size_t c, FrameRange frame_range) const;

 private:
  std::size_t capacity_ = 0;
  std::vector<double> samples_;
};

}  // namespace stillmass::recording
