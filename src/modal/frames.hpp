#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/recording/reader.hpp"

namespace stillmass::modal {

/// The samples of some channels over a range of frames, one vector a channel; nothing where the range leaves the
/// recording, crosses a gap or holds a sample that is not valid.
std::optional<std::vector<std::vector<double>>> read_frames(recording::Reader& reader, recording::FrameRange range,
                                                            std::span<const std::size_t> channels);

/// The segment a frame belongs to.
recording::FrameRange segment_of(const recording::Recording& recording, std::int64_t frame);

}  // namespace stillmass::modal
