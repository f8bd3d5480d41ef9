#include "spectral/base_band.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numbers>
#include <utility>

#include "stillmass/numeric/fir.hpp"

namespace stillmass::spectral {

namespace {

using recording::Chunk;
using recording::FrameRange;

constexpr double attenuation_db = 100.0;
constexpr double turn = 2.0 * std::numbers::pi;

/// Sums of even[k] (x[k] + x[-k]) and odd[k] (x[k] - x[-k]), in four lanes each so that they run at once.
std::complex<double> filtered(const BaseBand& band, const double* middle) {
  constexpr std::size_t lanes = 4;
  std::array<double, lanes> real{};
  std::array<double, lanes> imaginary{};
  const std::size_t n = band.even.size();
  const double* even = band.even.data();
  const double* odd = band.odd.data();
  std::size_t k = 1;
  for (; k + lanes <= n; k += lanes) {
    for (std::size_t j = 0; j < lanes; ++j) {
      const double later = middle[k + j];
      const double earlier = *(middle - (k + j));
      real[j] += even[k + j] * (later + earlier);
      imaginary[j] += odd[k + j] * (later - earlier);
    }
  }
  for (; k < n; ++k) {
    real[0] += even[k] * (middle[k] + *(middle - k));
    imaginary[0] += odd[k] * (middle[k] - *(middle - k));
  }
  return {even[0] * middle[0] + (real[0] + real[1]) + (real[2] + real[3]),
          -((imaginary[0] + imaginary[1]) + (imaginary[2] + imaginary[3]))};
}

}  // namespace

std::int64_t BaseBand::samples_in(std::int64_t frames) const {
  const std::int64_t filters = frames - 2 * half_length;
  return filters < 1 ? 0 : 1 + (filters - 1) / static_cast<std::int64_t>(factor);
}

double transition_for(double band_hz, double stretch_s) {
  constexpr double half_length = 3.21;  // (100 - 7.95) / (2 * 2.285 * 2 pi): Kaiser's, seconds times the transition
  constexpr double share = 0.01;
  return std::max(0.5 * band_hz, half_length / (share * stretch_s));
}

BaseBand base_band(double rate_hz, double centre_hz, double half_width_hz, double transition_hz) {
  BaseBand band;
  band.rate_hz = rate_hz;
  band.centre_hz = centre_hz;
  const double least_rate = 2.0 * half_width_hz + transition_hz;
  band.factor = std::max<std::size_t>(1, static_cast<std::size_t>(rate_hz / least_rate));
  std::vector<double> taps{1.0};
  if (band.factor > 1) {
    taps = numeric::kaiser_low_pass(half_width_hz / rate_hz, (band.low_rate_hz() - half_width_hz) / rate_hz,
                                    attenuation_db);
  }
  const std::size_t half = taps.size() / 2;
  band.half_length = static_cast<std::int64_t>(half);
  for (std::size_t k = 0; k <= half; ++k) {
    const double angle = turn * std::fmod(centre_hz / rate_hz * static_cast<double>(k), 1.0);
    band.even.push_back(taps[half + k] * std::cos(angle));
    band.odd.push_back(taps[half + k] * std::sin(angle));
  }
  return band;
}

LowRateStream::LowRateStream(std::shared_ptr<const BaseBand> band, const recording::Recording& recording,
                             FrameRange range, std::vector<std::size_t> channels)
    : band_(std::move(band)), channels_(std::move(channels)), owned_(range) {
  std::vector<FrameRange> parts;
  for (const recording::Segment& segment : recording.segments) {
    parts.push_back(
        {std::max(segment.first_frame, range.begin), std::min(segment.first_frame + segment.frames, range.end)});
  }
  parts_ = std::make_shared<const std::vector<FrameRange>>(std::move(parts));
}

LowRateStream::LowRateStream(const LowRateStream& whole, FrameRange owned)
    : band_(whole.band_), parts_(whole.parts_), channels_(whole.channels_), owned_(owned) {
  held_.resize(channels_.size());
  bad_.resize(channels_.size());
}

void LowRateStream::begin_segment(std::size_t segment, FrameRange part) {
  const auto factor = static_cast<std::int64_t>(band_->factor);
  segment_ = segment;
  next_ = (std::max<std::int64_t>(owned_.begin - part.begin, 0) + factor - 1) / factor;
  held_first_ = part.begin + next_ * factor;
  for (auto& held : held_) held.clear();
  for (auto& bad : bad_) bad.clear();
  LowRateRun run{segment, next_, {}};
  run.channels.resize(channels_.size());
  runs.push_back(std::move(run));
}

void LowRateStream::take(const Chunk& chunk) {
  const FrameRange part = (*parts_)[chunk.segment];
  if (chunk.segment != segment_) begin_segment(chunk.segment, part);
  hold(chunk, part);
  produce(part);
}

/// Adds the chunk's frames from the next filter's first one on.
void LowRateStream::hold(const Chunk& chunk, FrameRange part) {
  if (channels_.empty()) return;
  const std::int64_t held_end = held_.front().empty() ? std::max(held_first_, chunk.first_frame)
                                                      : held_first_ + static_cast<std::int64_t>(held_.front().size());
  const FrameRange fresh{std::max(chunk.first_frame, held_end), std::min(chunk.range().end, part.end)};
  if (fresh.size() == 0) return;
  const auto from = static_cast<std::ptrdiff_t>(fresh.begin - chunk.first_frame);
  const auto to = static_cast<std::ptrdiff_t>(fresh.end - chunk.first_frame);
  for (std::size_t i = 0; i < channels_.size(); ++i) {
    const auto samples = chunk.channel(channels_[i]);
    held_[i].insert(held_[i].end(), samples.begin() + from, samples.begin() + to);
    if (chunk.all_valid()) continue;
    std::int64_t at = fresh.begin;
    for (const FrameRange& good : chunk.valid[channels_[i]]) {
      if (good.begin > at) bad_[i].push_back({at, good.begin});
      at = std::max(at, good.end);
    }
    if (at < fresh.end) bad_[i].push_back({at, fresh.end});
  }
}

bool LowRateStream::is_good(std::size_t c, std::int64_t first) const {
  const std::int64_t end = first + 2 * band_->half_length + 1;
  return std::none_of(bad_[c].begin(), bad_[c].end(),
                      [&](const FrameRange& bad) { return bad.begin < end && first < bad.end; });
}

void LowRateStream::produce(FrameRange part) {
  if (channels_.empty() || held_.front().empty()) return;
  constexpr double nan = std::numeric_limits<double>::quiet_NaN();
  const auto factor = static_cast<std::int64_t>(band_->factor);
  const std::int64_t held_end = held_first_ + static_cast<std::int64_t>(held_.front().size());
  const auto first_of = [&](std::int64_t n) { return part.begin + n * factor; };
  for (; first_of(next_) < owned_.end && first_of(next_) + lookahead() < held_end; ++next_) {
    const std::int64_t first = first_of(next_);
    // The phase is counted from the segment's first sample.
    const double turns = std::fmod(band_->centre_hz / band_->rate_hz * static_cast<double>(next_ * factor), 1.0);
    const std::complex<double> mix = std::polar(1.0, -turn * turns);
    for (std::size_t c = 0; c < channels_.size(); ++c) {
      const double* middle = held_[c].data() + (first - held_first_ + band_->half_length);
      const bool good = bad_[c].empty() || is_good(c, first);
      runs.back().channels[c].push_back(good ? mix * filtered(*band_, middle) : std::complex<double>(nan, nan));
    }
  }
  const std::int64_t drop = std::min(first_of(next_), held_end) - held_first_;
  if (drop <= 0) return;
  for (auto& held : held_) held.erase(held.begin(), held.begin() + static_cast<std::ptrdiff_t>(drop));
  held_first_ += drop;
  if (held_.front().empty()) held_first_ = first_of(next_);
  for (auto& bad : bad_) std::erase_if(bad, [&](const FrameRange& range) { return range.end <= held_first_; });
}

}  // namespace stillmass::spectral
