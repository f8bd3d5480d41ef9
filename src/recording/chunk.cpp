#include "stillmass/recording/chunk.hpp"

#include <algorithm>

namespace stillmass::recording {

void Chunk::resize(std::size_t channel_count, std::size_t count) {
  frames = count;
  if (count > capacity_ || channel_count * capacity_ != samples_.size()) {
    // Five cache lines more, so that channels do not begin at the same place of the processor's caches.
    capacity_ = count + 40;
    samples_.resize(channel_count * capacity_);
  }
}

bool Chunk::is_valid(std::size_t c, FrameRange frame_range) const {
  if (frame_range.begin < range().begin || frame_range.end > range().end) return false;
  if (all_valid()) return true;
  return std::any_of(valid[c].begin(), valid[c].end(), [&](const FrameRange& good) {
    return good.begin <= frame_range.begin && frame_range.end <= good.end;
  });
}

}  // namespace stillmass::recording
