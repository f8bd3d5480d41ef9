#include "spectral/zoom_layout.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

constexpr std::size_t least_points = 16;

std::int64_t longest_part(const Recording& recording, FrameRange range) {
  std::int64_t longest = 0;
  for (const recording::Segment& s : recording.segments) {
    const FrameRange part{std::max(s.first_frame, range.begin), std::min(s.first_frame + s.frames, range.end)};
    longest = std::max(longest, part.size());
  }
  return longest;
}

void check(const Recording& recording, const ZoomOptions& options) {
  const base::Interval band = options.band_hz;
  const double half = 0.5 * recording.rate_hz;
  if (!(band.lo >= 0.0 && band.lo < band.hi && band.hi <= half)) {
    throw base::usage_error(recording.file.string(), fmt::format("a zoom from {} to {} Hz", band.lo, band.hi),
                            fmt::format("a band lies between 0 and {:.6g} Hz", half));
  }
  if (!(options.resolution_hz >= 0.0 && options.resolution_hz < band.width())) {
    throw base::usage_error(recording.file.string(), fmt::format("a resolution of {} Hz", options.resolution_hz),
                            fmt::format("lines can be up to {:.6g} Hz apart in that band", band.width()));
  }
  if (!(options.overlap >= 0.0 && options.overlap <= 0.95)) {
    throw base::usage_error({}, fmt::format("an overlap of {}", options.overlap),
                            "the overlap is a fraction, 0 to 0.95");
  }
  if (options.most_points < least_points) {
    throw base::usage_error({}, fmt::format("a block of {} points", options.most_points),
                            fmt::format("it has {} at least", least_points));
  }
}

}  // namespace

std::vector<std::size_t> zoom_channels(const Recording& recording, std::vector<std::size_t> channels) {
  if (channels.empty()) {
    channels.resize(recording.channels.size());
    std::iota(channels.begin(), channels.end(), std::size_t{0});
  }
  for (const std::size_t c : channels) {
    if (c >= recording.channels.size()) {
      throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", c + 1),
                              fmt::format("it has {}", recording.channels.size()));
    }
  }
  return channels;
}

ZoomLayout zoom_layout(const Recording& recording, FrameRange range, const ZoomOptions& options) {
  check(recording, options);
  const double rate = recording.rate_hz;
  const double width = options.band_hz.width();
  const std::int64_t frames = longest_part(recording, range);
  const double longest_s = static_cast<double>(frames) / rate;
  const auto most = static_cast<double>(options.most_points);
  const auto no_block = [&](double finest_hz) {
    return base::usage_error(recording.file.string(),
                             fmt::format("lines {:.3g} Hz apart from {:g} to {:g} Hz cannot be had",
                                         options.resolution_hz, options.band_hz.lo, options.band_hz.hi),
                             fmt::format("the finest are {:.3g} Hz apart", finest_hz));
  };
  if (frames < static_cast<std::int64_t>(least_points)) {
    throw base::usage_error(recording.file.string(),
                            fmt::format("no gapless part of the range holds {} samples", least_points),
                            "analyse a longer part");
  }
  double block_s = options.resolution_hz > 0.0 ? 1.0 / options.resolution_hz : longest_s;
  if (options.resolution_hz == 0.0) block_s = std::min(block_s, most / (1.5 * width));
  const double transition = std::min(transition_for(width, block_s), std::max(0.5 * width, most / block_s - width));

  ZoomLayout result;
  // A line more on each side: the centre is put on a line.
  result.band = base_band(rate, options.band_hz.middle(), 0.5 * width + 1.0 / block_s, transition);
  const std::int64_t room = result.band.samples_in(frames);
  const double low_rate = result.band.low_rate_hz();
  const std::size_t held = static_cast<std::size_t>(std::min<std::int64_t>(room, static_cast<std::int64_t>(most)));
  if (options.resolution_hz > 0.0) {
    const double wanted = std::ceil(low_rate / options.resolution_hz - 1e-9);
    result.points = fast_length_at_least(static_cast<std::size_t>(std::min(wanted, 2.0 * most)));
    if (result.points > held) throw no_block(low_rate / std::max(1.0, static_cast<double>(held)));
  } else {
    if (held < least_points) {
      throw base::usage_error(recording.file.string(), "the range is too short for a zoom into that band",
                              "take a wider band or a longer part");
    }
    result.points = fast_length_at_most(held);
  }
  result.centre_number = std::llround(options.band_hz.middle() / result.line_hz());
  const double centre = static_cast<double>(result.centre_number) * result.line_hz();
  result.band = base_band(rate, centre, 0.5 * width + 1.0 / block_s, transition);
  return result;
}

}  // namespace stillmass::spectral
