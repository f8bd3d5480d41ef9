#pragma once

#include <cstddef>
#include <optional>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/tacho.hpp"

namespace stillmass::rotation {

/// The longest part of a recording without a gap, with the pulses in it.
struct TachoPart {
  recording::FrameRange range;
  Pulses pulses;
  std::vector<base::Finding> findings;  ///< of the pulses; a gap that halved the recording
};

/// Within `time_s` (absent: all of it), from that channel (absent: the first with role tacho); `tacho.channel` is not
/// used. Refused: `no-tacho`, `no-pulses`. Throws `Error` (usage) for a time without frames.
base::Answer<TachoPart> tacho_part(const recording::Reader& reader, const std::optional<base::Interval>& time_s,
                                   std::optional<std::size_t> channel, TachoOptions tacho,
                                   const base::Context& context);

}  // namespace stillmass::rotation
