#include "rotation/tacho_part.hpp"

#include <utility>

#include "stillmass/base/error.hpp"

#include "rotation/longest_part.hpp"

namespace stillmass::rotation {

base::Answer<TachoPart> tacho_part(const recording::Reader& reader, const std::optional<base::Interval>& time_s,
                                   std::optional<std::size_t> channel, TachoOptions tacho,
                                   const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  const recording::FrameRange wanted = wanted_frames(recording, time_s);
  TachoPart part;
  part.range = longest_part(recording, wanted);
  if (part.range.size() == 0) throw base::usage_error("time range", "no frames of the recording lie in it");
  if (!channel) channel = tacho_channel(recording);
  if (!channel) {
    return base::Refusal{"no-tacho", "no channel of the recording is a tacho",
                         "record a once-per-turn pulse, or name the tacho's channel"};
  }
  tacho.channel = *channel;
  base::Answer<Pulses> pulses = find_pulses(reader, part.range, tacho, context);
  if (!pulses) return pulses.refusal();
  part.pulses = std::move(*pulses);
  part.findings = part.pulses.findings;
  if (part.range.size() < wanted.size()) part.findings.push_back(part_used(recording, part.range));
  return part;
}

}  // namespace stillmass::rotation
