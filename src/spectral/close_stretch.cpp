#include "spectral/close_stretch.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

namespace stillmass::spectral {

namespace {

using recording::FrameRange;

std::shared_ptr<const BaseBand> band_for(const recording::Recording& recording, FrameRange range,
                                         base::Interval band_hz) {
  std::int64_t longest = 1;
  for (const recording::Segment& s : recording.segments) {
    longest = std::max(longest, std::min(s.first_frame + s.frames, range.end) - std::max(s.first_frame, range.begin));
  }
  const double width = band_hz.width();
  const double transition = transition_for(width, static_cast<double>(longest) / recording.rate_hz);
  return std::make_shared<const BaseBand>(base_band(recording.rate_hz, band_hz.middle(), 0.5 * width, transition));
}

}  // namespace

CloseStretch::CloseStretch(const recording::Recording& recording, FrameRange range, std::size_t channel,
                           base::Interval band_hz)
    : stream_(band_for(recording, range, band_hz), recording, range, {channel}) {}

std::unique_ptr<recording::Consumer> CloseStretch::fresh(FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new CloseStretch(*this, owned));
}

void CloseStretch::end_stretch() {
  if (now_.samples.size() > best_.samples.size()) best_ = std::move(now_);
  now_ = {};
}

void CloseStretch::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<CloseStretch&>(next);
  for (const LowRateRun& run : other.stream_.runs) {
    if (run.segment != segment_) end_stretch();
    segment_ = run.segment;
    std::int64_t number = run.first;
    for (const auto& sample : run.channels.front()) {
      if (std::isnan(sample.real())) {
        end_stretch();
      } else if (now_.samples.size() < most_samples) {
        if (now_.samples.empty()) now_ = {stream_.part(segment_).begin, number, {}};
        now_.samples.push_back(sample);
      }
      ++number;
    }
  }
  other.stream_.runs.clear();
  if (now_.samples.size() > best_.samples.size()) best_ = now_;
}

double CloseStretch::turns_at(double place) const {
  const double turns_a_sample = band().centre_hz / band().low_rate_hz();
  return std::fmod(turns_a_sample * (static_cast<double>(best_.first) + place), 1.0);
}

double CloseStretch::frame_at(double place) const {
  const double sample = static_cast<double>(best_.first) + place;
  return static_cast<double>(best_.begin + band().half_length) + sample * static_cast<double>(band().factor);
}

}  // namespace stillmass::spectral
