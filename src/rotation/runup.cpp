#include "stillmass/rotation/runup.hpp"

#include <algorithm>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::rotation {
namespace {

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

}  // namespace

base::Answer<Runup> runup(const recording::Reader& reader, const RunupSettings& settings,
                          const base::Context& context) {
  const Recording& recording = reader.recording();
  const FrameRange wanted = wanted_frames(recording, settings.time_s);
  const FrameRange range = longest_part(recording, wanted);
  if (range.size() == 0) throw base::usage_error("time range", "no frames of the recording lie in it");

  TachoOptions tacho = settings.tacho;
  const auto channel = settings.tacho_channel ? settings.tacho_channel : tacho_channel(recording);
  if (!channel) {
    return base::Refusal{"no-tacho", "no channel of the recording is a tacho",
                         "record a once-per-turn pulse, or name the tacho's channel"};
  }
  tacho.channel = *channel;
  base::Answer<Pulses> pulses = find_pulses(reader, range, tacho, context);
  if (!pulses) return pulses.refusal();

  SpeedCurve curve(*pulses);
  const double turns = curve.turns().width();
  if (turns < static_cast<double>(settings.orders.turns_per_block) + 1.0) {
    return base::Refusal{
        "too-few-turns",
        fmt::format("{:.0f} turns with pulses; a block takes {}", turns, settings.orders.turns_per_block),
        "record longer, or take fewer turns per block"};
  }
  Runup out{std::move(*pulses), std::move(curve), {}, {}, {}};
  out.findings = out.pulses.findings;
  if (range.size() < wanted.size()) out.findings.push_back(part_used(recording, range));
  out.tracks = order_tracks(reader, range, out.speed, settings.orders, context);
  if (settings.with_waterfall) out.waterfalls = waterfalls(reader, range, &out.speed, settings.waterfall, context);
  return out;
}

}  // namespace stillmass::rotation
