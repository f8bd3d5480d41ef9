#include "stillmass/rotation/runup.hpp"

#include <fmt/format.h>

#include "rotation/tacho_part.hpp"

namespace stillmass::rotation {
base::Answer<Runup> runup(const recording::Reader& reader, const RunupSettings& settings,
                          const base::Context& context) {
  auto part = tacho_part(reader, settings.time_s, settings.tacho_channel, settings.tacho, context);
  if (!part) return part.refusal();
  const recording::FrameRange range = part->range;
  SpeedCurve curve(part->pulses);
  const double turns = curve.turns().width();
  if (turns < static_cast<double>(settings.orders.turns_per_block) + 1.0) {
    return base::Refusal{
        "too-few-turns",
        fmt::format("{:.0f} turns with pulses; a block takes {}", turns, settings.orders.turns_per_block),
        "record longer, or take fewer turns per block"};
  }
  Runup out{std::move(part->pulses), std::move(curve), {}, {}, std::move(part->findings)};
  out.tracks = order_tracks(reader, range, out.speed, settings.orders, context);
  if (settings.with_waterfall) out.waterfalls = waterfalls(reader, range, &out.speed, settings.waterfall, context);
  return out;
}

}  // namespace stillmass::rotation
