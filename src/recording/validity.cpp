#include "recording/validity.hpp"

#include <algorithm>

namespace stillmass::recording {

void Validity::mark_bad(std::size_t channel, std::int64_t frame) {
  std::vector<FrameRange>& ranges = bad_[channel];
  if (!ranges.empty() && ranges.back().end == frame) {
    ++ranges.back().end;
  } else {
    ranges.push_back({frame, frame + 1});
  }
  any_ = true;
}

void Validity::finish(Chunk& chunk) {
  chunk.valid.clear();
  if (!any_) return;
  chunk.valid.resize(bad_.size());
  for (std::size_t c = 0; c < bad_.size(); ++c) {
    std::int64_t good_from = chunk.first_frame;
    const auto samples = chunk.channel(c);
    for (const FrameRange& bad : bad_[c]) {
      if (bad.begin > good_from) chunk.valid[c].push_back({good_from, bad.begin});
      good_from = bad.end;
      std::fill_n(samples.begin() + (bad.begin - chunk.first_frame), bad.size(), 0.0);
    }
    if (good_from < chunk.range().end) chunk.valid[c].push_back({good_from, chunk.range().end});
    bad_[c].clear();
  }
  any_ = false;
}

}  // namespace stillmass::recording
