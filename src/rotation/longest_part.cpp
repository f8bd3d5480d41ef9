#include "rotation/longest_part.hpp"

#include <algorithm>

#include <fmt/format.h>

namespace stillmass::rotation {

using recording::FrameRange;
using recording::Recording;

FrameRange wanted_frames(const Recording& recording, const std::optional<base::Interval>& time_s) {
  if (!time_s) return {0, recording.frames};
  return {std::clamp<std::int64_t>(recording.frame_at(time_s->lo), 0, recording.frames),
          std::clamp<std::int64_t>(recording.frame_at(time_s->hi), 0, recording.frames)};
}

// The longest part of the range without a gap.
FrameRange longest_part(const Recording& recording, FrameRange range) {
  FrameRange best{range.begin, range.begin};
  for (const recording::Segment& segment : recording.segments) {
    const FrameRange part{std::max(range.begin, segment.first_frame),
                          std::min(range.end, segment.first_frame + segment.frames)};
    if (part.size() > best.size()) best = part;
  }
  return best;
}

std::optional<std::size_t> tacho_channel(const Recording& recording) {
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    if (recording.channels[c].role == recording::Role::tacho) return c;
  }
  return {};
}

base::Finding part_used(const Recording& recording, FrameRange part) {
  base::Finding finding;
  finding.code = base::Code::gap;
  finding.from_s = recording.time_s(part.begin);
  finding.to_s = recording.time_s(part.end - 1);
  finding.text = fmt::format("a gap parts the recording; only {:.2f} s to {:.2f} s, the longest part, is used",
                             *finding.from_s, *finding.to_s);
  finding.strength = base::Strength::fair;
  return finding;
}

}  // namespace stillmass::rotation
