#pragma once

#include <algorithm>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/recording/reader.hpp"

namespace stillmass::rotation {

/// Calls `take(first_frame, samples)` for windows of `length` frames every `hop` frames of a range within one segment,
/// in order; windows with an invalid sample are left out. Holds one window and one chunk. `take` returns false to stop.
template <class Take>
void stream_windows(const recording::Reader& reader, std::size_t channel, recording::FrameRange range,
                    std::size_t length, std::size_t hop, const base::Context& context, Take&& take) {
  constexpr std::size_t at_once = std::size_t{1} << 15;
  const auto handle = reader.second();
  handle->seek(range.begin);
  std::vector<double> held;
  std::int64_t first = range.begin;       // frame of held[0]
  std::int64_t next = range.begin;        // first frame of the next window
  std::int64_t clean_from = range.begin;  // after the last invalid sample of the chunks before
  recording::Chunk chunk;
  while (first + static_cast<std::int64_t>(held.size()) < range.end) {
    context.check_stop();
    const auto left = static_cast<std::size_t>(range.end - first - static_cast<std::int64_t>(held.size()));
    if (!handle->next(chunk, std::min(at_once, left))) break;
    const auto samples = chunk.channel(channel);
    held.insert(held.end(), samples.begin(), samples.end());
    while (next + static_cast<std::int64_t>(length) <= first + static_cast<std::int64_t>(held.size())) {
      const auto offset = static_cast<std::size_t>(next - first);
      const recording::FrameRange seen{std::max(next, chunk.first_frame), next + static_cast<std::int64_t>(length)};
      const bool valid = seen.size() == 0 || chunk.is_valid(channel, seen);
      if (valid && next >= clean_from && !take(next, std::span<const double>(held).subspan(offset, length))) return;
      next += static_cast<std::int64_t>(hop);
    }
    if (!chunk.all_valid()) {
      const auto& valid = chunk.valid[channel];
      if (valid.empty() || valid.back().end != chunk.range().end) {
        clean_from = chunk.range().end;
      } else if (valid.back().begin > chunk.first_frame) {
        clean_from = valid.back().begin;
      }
    }
    const auto done = std::min(held.size(), static_cast<std::size_t>(next - first));
    held.erase(held.begin(), held.begin() + static_cast<std::ptrdiff_t>(done));
    first += static_cast<std::int64_t>(done);
  }
}

}  // namespace stillmass::rotation
