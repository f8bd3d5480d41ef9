#pragma once

#include <cstdint>
#include <vector>

#include "stillmass/recording/chunk.hpp"

namespace stillmass::recording {

/// Collects the samples of a chunk that must not be used and turns them into the chunk's valid ranges.
class Validity {
 public:
  explicit Validity(std::size_t channels) : bad_(channels) {}

  /// Frames must come in ascending order for each channel.
  void mark_bad(std::size_t channel, std::int64_t frame);
  /// Writes `chunk.valid` for the chunk's frames, and 0 into the bad samples; starts afresh.
  void finish(Chunk& chunk);

 private:
  std::vector<std::vector<FrameRange>> bad_;
  bool any_ = false;
};

}  // namespace stillmass::recording
