#include "stillmass/recording/recording.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::recording {
namespace {

// A time that was computed from a frame number and comes back must give that frame again.
constexpr double rounding_frames = 1e-6;

}  // namespace

double Recording::duration_s() const {
  if (segments.empty()) return 0.0;
  const Segment& last = segments.back();
  return last.start_s + static_cast<double>(last.frames) / rate_hz;
}

double Recording::time_s(std::int64_t frame) const {
  if (segments.empty()) return static_cast<double>(frame) / rate_hz;
  const auto after = std::upper_bound(segments.begin(), segments.end(), frame,
                                      [](std::int64_t f, const Segment& segment) { return f < segment.first_frame; });
  const Segment& segment = after == segments.begin() ? segments.front() : *std::prev(after);
  return segment.start_s + static_cast<double>(frame - segment.first_frame) / rate_hz;
}

std::int64_t Recording::frame_at(double time_s) const {
  for (const Segment& segment : segments) {
    const double offset = std::ceil((time_s - segment.start_s) * rate_hz - rounding_frames);
    if (offset <= 0.0) return segment.first_frame;
    if (offset < static_cast<double>(segment.frames)) return segment.first_frame + static_cast<std::int64_t>(offset);
  }
  return frames;
}

}  // namespace stillmass::recording
