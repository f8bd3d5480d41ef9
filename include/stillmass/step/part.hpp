#pragma once

#include <optional>

#include "stillmass/recording/recording.hpp"

namespace stillmass::step {

/// The part of a recording that a step works on, s from its start; absent ends: its own.
struct Part {
  std::optional<double> from_s;
  std::optional<double> to_s;
};

/// The frames of the part. Throws `Error` (usage) where it is empty or begins behind the end of the recording.
recording::FrameRange frames_of(const recording::Recording& recording, const Part& part);

}  // namespace stillmass::step
