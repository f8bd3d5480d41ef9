#pragma once

#include <span>
#include <vector>

#include "stillmass/step/check.hpp"

namespace stillmass::step {

// Checks that need more than the samples or the spectrum of one channel. Thresholds: common practice.

/// Of each tacho channel: `missing_pulses`, `extra_pulses`, `no_pulses`; `channels_swapped` where a channel stated as
/// vibration carries pulses. Looks at the first ten minutes of the longest segment.
void judge_tachos(std::span<ChannelCheck> channels, const recording::Reader& reader, recording::FrameRange range,
                  const CheckRequest& request, const base::Context& context);

/// `identical_channels`: the same samples, or the same signal with another factor (one sensor on two inputs).
void judge_likeness(std::span<ChannelCheck> channels, std::span<const spectral::Spectrum> spectra);

/// `unit_suspected`: the earth's acceleration read in the wrong unit, or a level that no machine and no sensor has.
void judge_units(std::span<ChannelCheck> channels, std::span<const spectral::Spectrum> spectra);

}  // namespace stillmass::step
