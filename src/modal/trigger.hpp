#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/recording/reader.hpp"

namespace stillmass::modal {

/// Lowest and highest sample of every 20 ms of one channel, with what is ordinary in it.
struct Levels {
  std::int64_t first_frame = 0;
  std::int64_t hop = 0;  ///< frames
  std::vector<double> low;
  std::vector<double> high;
  double offset = 0.0;  ///< median of the means
  double noise = 0.0;   ///< lower quintile of the standard deviations: between blows
  double peak = 0.0;    ///< largest distance from the offset
  bool upward = true;   ///< the peak lies above the offset

  std::int64_t frame(std::size_t h) const { return first_frame + static_cast<std::int64_t>(h) * hop; }
  double distance(std::size_t h) const;  ///< largest of the hop from the offset, either way
};

/// One pass over the range, all channels asked for. Hops with a sample that is not valid stand at the offset. With
/// `second_extremes` the highest and the lowest sample of a hop do not count, so that a single wrong sample is no blow.
std::vector<Levels> measure_levels(recording::Reader& reader, recording::FrameRange range,
                                   std::span<const std::size_t> channels, bool second_extremes,
                                   const base::Context& context);

/// First frames of the pulses of a force: above 2 % of the highest and 8 times the noise, on the side of the highest.
std::vector<std::int64_t> force_pulses(recording::Reader& reader, std::size_t channel, const Levels& levels);
/// First frames of the rises of a response: above twice its level in the last 0.5 s, 10 % of the highest and 8 times
/// the noise.
std::vector<std::int64_t> response_rises(recording::Reader& reader, std::size_t channel, const Levels& levels);

}  // namespace stillmass::modal
