#pragma once

#include <optional>

#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/recording.hpp"

namespace stillmass::rotation {

/// The frames of that time; absent: all of them.
recording::FrameRange wanted_frames(const recording::Recording& recording, const std::optional<base::Interval>& time_s);

/// The longest part of the range without a gap.
recording::FrameRange longest_part(const recording::Recording& recording, recording::FrameRange range);

/// Says that a gap parts the recording and which part is used.
base::Finding part_used(const recording::Recording& recording, recording::FrameRange part);

/// The first channel with role tacho.
std::optional<std::size_t> tacho_channel(const recording::Recording& recording);

}  // namespace stillmass::rotation
