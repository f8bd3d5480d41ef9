#pragma once

#include "stillmass/recording/sample_quality.hpp"

#include "recording/channel_samples.hpp"

namespace stillmass::recording {

/// Numbers and findings of one channel from what was gathered of it over a whole pass.
ChannelQuality judge_channel(const Recording& recording, const Channel& channel, ChannelSamples samples);

}  // namespace stillmass::recording
