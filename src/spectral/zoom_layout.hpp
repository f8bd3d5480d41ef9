#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

#include "stillmass/spectral/zoom.hpp"

#include "spectral/base_band.hpp"

namespace stillmass::spectral {

/// The base band and the points of a block in it.
struct ZoomLayout {
  BaseBand band;
  std::size_t points = 0;
  std::int64_t centre_number = 0;  ///< of the line at the centre

  double line_hz() const { return band.low_rate_hz() / static_cast<double>(points); }
};

/// Throws as `ZoomConsumer`.
ZoomLayout zoom_layout(const recording::Recording& recording, recording::FrameRange range, const ZoomOptions& options);

/// The channels asked for, or all. Throws `Error` (usage) for one that is not there.
std::vector<std::size_t> zoom_channels(const recording::Recording& recording, std::vector<std::size_t> channels);

}  // namespace stillmass::spectral
