#include "stillmass/rotation/runup.hpp"

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

#include "rotation/longest_part.hpp"

namespace stillmass::rotation {
using recording::FrameRange;
using recording::Recording;

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
