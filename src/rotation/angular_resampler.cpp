#include "stillmass/rotation/angular_resampler.hpp"

#include <algorithm>
#include <cmath>
#include <span>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/fir.hpp"

namespace stillmass::rotation {
namespace {

using recording::FrameRange;

// The recording's rate is halved while it stays this many times above the rate of the angular samples: what the halving
// lets through or folds then lies beyond the kernel's stop band.
constexpr double spare_rate = 2.5;
// A halving keeps up to 0.6 of the angular rate, which is at most 0.24 of the halved rate.
constexpr double halving_pass = 0.12;
constexpr double stop_db = 100.0;
// Reach of all halvings (13 samples of the last) and the alignment of their grid, in angular samples, rounded up.
constexpr double halving_reach = 7.0;
constexpr std::size_t chunk_frames = 1 << 14;

// One channel halved in rate several times, as a stream.
class Halvings {
 public:
  Halvings(std::size_t count, const std::vector<double>& half_band)
      : stages_(count, numeric::Decimator(half_band, 2)), between_(count) {}

  void push(std::span<const double> in, std::vector<double>& out) {
    for (std::size_t i = 0; i < stages_.size(); ++i) {
      between_[i].clear();
      stages_[i].push(in, between_[i]);
      in = between_[i];
    }
    out.insert(out.end(), in.begin(), in.end());
  }
  void finish(std::vector<double>& out) {
    std::span<const double> in;
    for (std::size_t i = 0; i < stages_.size(); ++i) {
      between_[i].clear();
      stages_[i].push(in, between_[i]);
      stages_[i].finish(between_[i]);
      in = between_[i];
    }
    out.insert(out.end(), in.begin(), in.end());
  }

 private:
  std::vector<numeric::Decimator> stages_;
  std::vector<std::vector<double>> between_;
};

// The chosen channels at the halved rate, and the frames that are not to be used.
struct Halved {
  std::vector<std::vector<double>> channels;
  std::vector<std::vector<FrameRange>> invalid;
};

void add_invalid(const recording::Chunk& chunk, std::size_t channel, std::vector<FrameRange>& invalid) {
  if (chunk.all_valid()) return;
  std::int64_t from = chunk.first_frame;
  for (const FrameRange& good : chunk.valid[channel]) {
    if (good.begin > from) invalid.push_back({from, good.begin});
    from = good.end;
  }
  if (from < chunk.range().end) invalid.push_back({from, chunk.range().end});
}

Halved read(recording::Reader& reader, FrameRange range, const std::vector<std::size_t>& channels,
            std::size_t halvings) {
  static const std::vector<double> half_band = numeric::half_band(halving_pass, stop_db);
  std::vector<Halvings> filters(channels.size(), Halvings(halvings, half_band));
  Halved out;
  out.channels.resize(channels.size());
  out.invalid.resize(channels.size());
  reader.seek(range.begin);
  recording::Chunk chunk;
  for (std::int64_t frame = range.begin; frame < range.end; frame = chunk.range().end) {
    const auto wanted = static_cast<std::size_t>(std::min<std::int64_t>(chunk_frames, range.end - frame));
    if (!reader.next(chunk, wanted)) {
      throw base::file_error(reader.recording().file.string(), "ended while it was being read", "copy it again");
    }
    for (std::size_t c = 0; c < channels.size(); ++c) {
      filters[c].push(chunk.channel(channels[c]), out.channels[c]);
      add_invalid(chunk, channels[c], out.invalid[c]);
    }
  }
  for (std::size_t c = 0; c < channels.size(); ++c) filters[c].finish(out.channels[c]);
  return out;
}

}  // namespace

bool AngularBlock::is_valid(std::size_t channel, AngularRange range) const {
  return std::none_of(invalid[channel].begin(), invalid[channel].end(),
                      [&](const AngularRange& bad) { return bad.begin < range.end && range.begin < bad.end; });
}

AngularResampler::AngularResampler(const recording::Reader& reader, FrameRange range, const SpeedCurve& curve,
                                   AngularOptions options)
    : reader_(reader.second()),
      range_(range),
      curve_(&curve),
      options_(std::move(options)),
      kernel_(std::make_shared<const numeric::KaiserSinc>(16, stop_db)) {
  if (options_.samples_per_turn < 4) throw base::usage_error("samples per turn", "must be at least 4");
  for (const std::size_t channel : options_.channels) {
    if (channel >= reader.recording().channels.size()) {
      throw base::usage_error("orders", fmt::format("there is no channel {}", channel + 1));
    }
  }
  const auto per_turn = static_cast<double>(options_.samples_per_turn);
  available_.begin = static_cast<std::int64_t>(std::ceil(curve.turns().lo * per_turn));
  available_.end = static_cast<std::int64_t>(std::floor(curve.turns().hi * per_turn)) + 1;
  const recording::Recording& recording = reader.recording();
  const double first_s = recording.time_s(range.begin);
  const double last_s = first_s + static_cast<double>(range.size() - 1) / recording.rate_hz;
  while (available_.size() > 0 && time_at(available_.begin) - reach_s(available_.begin) < first_s) ++available_.begin;
  while (available_.size() > 0 && time_at(available_.end - 1) + reach_s(available_.end - 1) > last_s) {
    --available_.end;
  }
}

AngularResampler::AngularResampler(const AngularResampler& other, std::unique_ptr<recording::Reader> reader)
    : reader_(std::move(reader)),
      range_(other.range_),
      curve_(other.curve_),
      options_(other.options_),
      kernel_(other.kernel_),
      available_(other.available_) {}

AngularResampler AngularResampler::second() const { return AngularResampler(*this, reader_->second()); }

double AngularResampler::turn_at(std::int64_t sample) const {
  return static_cast<double>(sample) / static_cast<double>(options_.samples_per_turn);
}

double AngularResampler::time_at(std::int64_t sample) const { return curve_->time_at(turn_at(sample)); }

double AngularResampler::angular_rate(std::int64_t sample) const {
  return static_cast<double>(options_.samples_per_turn) * curve_->speed_at_turn(turn_at(sample));
}

double AngularResampler::reach_s(std::int64_t sample) const {
  const double rate = angular_rate(sample);
  return kernel_->reach(1.0) / std::min(rate, reader_->recording().rate_hz) + halving_reach / rate;
}

// Where the angular samples of a block stand among the frames, and what it takes to get them.
struct AngularResampler::Plan {
  std::vector<double> frame;  // of each angular sample, with its fraction
  std::vector<double> reach;  // frames on each side that it depends on
  std::vector<double> rate;   // angular samples per second, there
  FrameRange needed;          // begins at a multiple of the stride, so that kept frames do not depend on the block
  int halvings = 0;
};

AngularResampler::Plan AngularResampler::plan(AngularRange wanted) const {
  const recording::Recording& recording = reader_->recording();
  const double start_s = recording.time_s(range_.begin);
  Plan plan;
  double lowest = static_cast<double>(range_.end);
  double highest = static_cast<double>(range_.begin);
  double highest_rate = 0.0;
  for (std::int64_t sample = wanted.begin; sample < wanted.end; ++sample) {
    const double frame = static_cast<double>(range_.begin) + (time_at(sample) - start_s) * recording.rate_hz;
    const double reach = reach_s(sample) * recording.rate_hz;
    plan.frame.push_back(frame);
    plan.reach.push_back(reach);
    plan.rate.push_back(angular_rate(sample));
    highest_rate = std::max(highest_rate, plan.rate.back());
    lowest = std::min(lowest, frame - reach);
    highest = std::max(highest, frame + reach);
  }
  while (recording.rate_hz / std::ldexp(1.0, plan.halvings + 1) >= spare_rate * highest_rate) ++plan.halvings;
  const std::int64_t stride = std::int64_t{1} << plan.halvings;
  const auto first = std::max(range_.begin, static_cast<std::int64_t>(std::floor(lowest)));
  plan.needed.begin = (first + stride - 1) / stride * stride;
  plan.needed.end = std::min(range_.end, static_cast<std::int64_t>(std::ceil(highest)) + 1);
  return plan;
}

AngularBlock AngularResampler::samples(AngularRange wanted) {
  if (wanted.begin < available_.begin || wanted.end > available_.end) {
    throw base::Error(base::ErrorKind::internal, "angular samples", "asked for samples that are not available");
  }
  AngularBlock block;
  block.first = wanted.begin;
  if (wanted.size() == 0) {
    block.channels.resize(options_.channels.size());
    block.invalid.resize(options_.channels.size());
    return block;
  }
  const Plan how = plan(wanted);
  const auto stride = static_cast<double>(std::int64_t{1} << how.halvings);
  const double halved_rate = reader_->recording().rate_hz / stride;
  const Halved halved = read(*reader_, how.needed, options_.channels, static_cast<std::size_t>(how.halvings));
  for (std::size_t c = 0; c < options_.channels.size(); ++c) {
    std::vector<double>& out = block.channels.emplace_back(how.frame.size());
    for (std::size_t i = 0; i < out.size(); ++i) {
      const double position = (how.frame[i] - static_cast<double>(how.needed.begin)) / stride;
      out[i] = kernel_->at(halved.channels[c], position, std::min(1.0, how.rate[i] / halved_rate));
    }
    std::vector<AngularRange>& invalid = block.invalid.emplace_back();
    for (const FrameRange& bad : halved.invalid[c]) {
      AngularRange hit{wanted.end, wanted.begin};
      for (std::size_t i = 0; i < out.size(); ++i) {
        if (how.frame[i] + how.reach[i] < static_cast<double>(bad.begin)) continue;
        if (how.frame[i] - how.reach[i] >= static_cast<double>(bad.end)) break;
        hit = {std::min(hit.begin, wanted.begin + static_cast<std::int64_t>(i)),
               wanted.begin + static_cast<std::int64_t>(i) + 1};
      }
      if (hit.size() > 0) invalid.push_back(hit);
    }
  }
  return block;
}

}  // namespace stillmass::rotation
