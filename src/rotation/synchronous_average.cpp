#include "stillmass/rotation/synchronous_average.hpp"

#include <algorithm>
#include <cmath>
#include <memory>
#include <numbers>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/rotation/angular_resampler.hpp"
#include "stillmass/spectral/block_transform.hpp"

#include "rotation/tacho_part.hpp"

namespace stillmass::rotation {
namespace {

using Complex = std::complex<double>;

constexpr std::size_t least_blocks = 4;
constexpr std::int64_t turns_at_once = 128;  // of one piece of work: what is held of the recording at a time
constexpr double usable = 0.4;               // of the samples per turn, and of the rate: the resampler is flat so far

// Sums over the blocks of one channel.
struct Sums {
  std::size_t blocks = 0;
  std::vector<double> sample, sample_square;  // at each angle
  // Of the Fourier coefficient of each line: sums, and of the products of its parts.
  std::vector<Complex> line;
  std::vector<double> real_square, imaginary_square, product;

  Sums(std::size_t samples, std::size_t lines)
      : sample(samples),
        sample_square(samples),
        line(lines),
        real_square(lines),
        imaginary_square(lines),
        product(lines) {}

  void merge(const Sums& other) {
    blocks += other.blocks;
    const auto add = [](auto& mine, const auto& theirs) {
      std::transform(mine.begin(), mine.end(), theirs.begin(), mine.begin(), std::plus<>());
    };
    add(sample, other.sample);
    add(sample_square, other.sample_square);
    add(line, other.line);
    add(real_square, other.real_square);
    add(imaginary_square, other.imaginary_square);
    add(product, other.product);
  }
};

// Enough that the highest order lies within the resampler's flat band.
std::size_t samples_per_turn(double highest_order) {
  std::size_t out = 16;
  while (usable * static_cast<double>(out) < highest_order) out *= 2;
  return out;
}

void check(const recording::Recording& recording, const SynchronousOptions& options) {
  if (options.turns_per_block < 1 || options.turns_per_block > 64) {
    throw base::usage_error("synchronous average", "a block must have 1 to 64 turns");
  }
  if (!(options.highest_order >= 1.0 && options.highest_order <= 100.0)) {
    throw base::usage_error("synchronous average", fmt::format("a highest order of {}", options.highest_order),
                            "give 1 to 100");
  }
  for (const std::size_t channel : options.channels) {
    if (channel >= recording.channels.size()) {
      throw base::usage_error("synchronous average", fmt::format("there is no channel {}", channel + 1));
    }
  }
}

// Cuts a recording into blocks of turns and sums them.
class Averager {
 public:
  Averager(const recording::Reader& reader, recording::FrameRange range, const SpeedCurve& curve,
           const SynchronousOptions& options)
      : options_(options),
        per_turn_(samples_per_turn(options.highest_order)),
        turns_(static_cast<std::int64_t>(options.turns_per_block)),
        resampler_(reader, range, curve, {per_turn_, options.channels}),
        transform_(std::vector<double>(samples(), 1.0)) {
    const AngularRange all = resampler_.available();
    const auto length = static_cast<std::int64_t>(samples());
    first_ = (all.begin + length - 1) / length;
    blocks_ = all.size() == 0 ? 0 : static_cast<std::size_t>(std::max<std::int64_t>(all.end / length - first_, 0));
    if (blocks_ == 0) return;
    const double from = static_cast<double>(first_ * turns_);
    const double to = from + static_cast<double>(static_cast<std::int64_t>(blocks_) * turns_);
    mean_speed_ = curve.mean_speed(from, to).value;
    const double highest =
        std::min(options.highest_order, usable * reader.recording().rate_hz / curve.speed_range().hi);
    lines_ = static_cast<std::size_t>(std::floor(highest * static_cast<double>(turns_) + 1e-9)) + 1;
  }

  std::size_t blocks() const { return blocks_; }
  std::size_t samples() const { return per_turn_ * options_.turns_per_block; }
  std::size_t grain() const { return static_cast<std::size_t>(std::max<std::int64_t>(1, turns_at_once / turns_)); }
  std::vector<Sums> none() const { return {options_.channels.size(), Sums(samples(), lines_)}; }

  std::vector<Sums> sums(std::size_t begin, std::size_t end) const {
    AngularResampler resampler = resampler_.second();
    spectral::BlockTransform transform(transform_);
    const AngularBlock held = resampler.samples({range_of(begin).begin, range_of(end - 1).end});
    std::vector<Sums> out = none();
    for (std::size_t block = begin; block < end; ++block) {
      const AngularRange range = range_of(block);
      for (std::size_t c = 0; c < out.size(); ++c) {
        if (!held.is_valid(c, range)) continue;
        add(out[c], transform,
            std::span(held.channels[c]).subspan(static_cast<std::size_t>(range.begin - held.first), samples()));
      }
    }
    return out;
  }

  SynchronousAverage average(const Sums& sums, const recording::Channel& channel) const;

 private:
  AngularRange range_of(std::size_t block) const {
    const auto length = static_cast<std::int64_t>(samples());
    const std::int64_t begin = (first_ + static_cast<std::int64_t>(block)) * length;
    return {begin, begin + length};
  }

  void add(Sums& sums, spectral::BlockTransform& transform, std::span<const double> block) const {
    ++sums.blocks;
    for (std::size_t i = 0; i < block.size(); ++i) {
      sums.sample[i] += block[i];
      sums.sample_square[i] += block[i] * block[i];
    }
    const auto x = transform(block);
    const double scale = std::numbers::sqrt2 / static_cast<double>(block.size());
    for (std::size_t k = 1; k < lines_; ++k) {
      const Complex value = scale * x[k];
      sums.line[k] += value;
      sums.real_square[k] += value.real() * value.real();
      sums.imaginary_square[k] += value.imag() * value.imag();
      sums.product[k] += value.real() * value.imag();
    }
  }

  SynchronousLine line(const Sums& sums, std::size_t k, base::Quantity quantity) const;

  SynchronousOptions options_;
  std::size_t per_turn_;
  std::int64_t turns_;
  AngularResampler resampler_;
  spectral::BlockTransform transform_;
  std::int64_t first_ = 0;  // number of the first block from the first pulse
  std::size_t blocks_ = 0;
  std::size_t lines_ = 0;
  double mean_speed_ = 0.0;
};

SynchronousLine Averager::line(const Sums& sums, std::size_t k, base::Quantity quantity) const {
  const auto n = static_cast<double>(sums.blocks);
  SynchronousLine out;
  out.order = static_cast<double>(k) / static_cast<double>(turns_);
  out.value = sums.line[k] / n;
  out.amplitude_rms = {std::abs(out.value), std::nullopt, std::nullopt, quantity};
  const double lag = std::fmod(-std::arg(out.value) * 180.0 / std::numbers::pi + 360.0, 360.0);
  out.phase_lag_deg = lag >= 360.0 ? 0.0 : lag;
  if (sums.blocks < 2) return out;
  // Scatter of the blocks about their mean, turned into the direction of the mean (amplitude) and across it (phase).
  const double real = sums.real_square[k] - n * out.value.real() * out.value.real();
  const double imaginary = sums.imaginary_square[k] - n * out.value.imag() * out.value.imag();
  const double product = sums.product[k] - n * out.value.real() * out.value.imag();
  const double c = out.amplitude_rms.value > 0.0 ? out.value.real() / out.amplitude_rms.value : 1.0;
  const double s = out.amplitude_rms.value > 0.0 ? out.value.imag() / out.amplitude_rms.value : 0.0;
  const double along = c * c * real + s * s * imaginary + 2.0 * c * s * product;
  const double across = s * s * real + c * c * imaginary - 2.0 * c * s * product;
  out.amplitude_rms.u = std::sqrt(std::max(along, 0.0) / (n * (n - 1.0)));
  out.amplitude_rms.dof = n - 1.0;
  const double u_across = std::sqrt(std::max(across, 0.0) / (n * (n - 1.0)));
  if (u_across < out.amplitude_rms.value) {
    out.phase_u_deg = std::atan(u_across / out.amplitude_rms.value) * 180.0 / std::numbers::pi;
  }
  return out;
}

SynchronousAverage Averager::average(const Sums& sums, const recording::Channel& channel) const {
  SynchronousAverage out;
  out.channel = channel.name;
  out.quantity = channel.unit.quantity;
  out.turns_per_block = options_.turns_per_block;
  out.samples_per_turn = per_turn_;
  out.blocks = sums.blocks;
  if (sums.blocks == 0) return out;
  const auto n = static_cast<double>(sums.blocks);
  const auto angles = static_cast<double>(samples());
  double square = 0.0;
  double variance = 0.0;  // of the blocks, mean over the angles
  for (std::size_t i = 0; i < sums.sample.size(); ++i) {
    const double mean = sums.sample[i] / n;
    out.waveform.push_back(mean);
    out.mean += mean / angles;
    square += sums.sample_square[i] / (n * angles);
    const double scatter = sums.blocks > 1 ? std::max(sums.sample_square[i] - n * mean * mean, 0.0) / (n - 1.0) : 0.0;
    out.deviation.push_back(std::sqrt(scatter));
    variance += scatter / angles;
  }
  double of_waveform = 0.0;
  for (const double mean : out.waveform) of_waveform += (mean - out.mean) * (mean - out.mean) / angles;
  out.mean_square = std::max(square - out.mean * out.mean, 0.0);
  out.synchronous_mean_square = std::max(of_waveform - variance / n, 0.0);
  if (out.mean_square > 0.0) {
    out.synchronous_share = std::min(out.synchronous_mean_square / out.mean_square, 1.0);
  }
  out.speed_hz = mean_speed_;
  for (std::size_t k = 1; k < lines_; ++k) out.lines.push_back(line(sums, k, out.quantity));
  return out;
}

base::Refusal too_few(std::size_t blocks, std::size_t turns_per_block) {
  return {"too-few-turns",
          fmt::format("{} blocks of {} turns with pulses; an average takes {}", blocks, turns_per_block, least_blocks),
          "record longer at the speed, or take fewer turns per block"};
}

}  // namespace

double SynchronousAverage::standard_error(std::size_t i) const {
  return deviation[i] / std::sqrt(static_cast<double>(blocks));
}

base::Answer<std::vector<SynchronousAverage>> synchronous_averages(const recording::Reader& reader,
                                                                   recording::FrameRange range, const SpeedCurve& curve,
                                                                   const SynchronousOptions& options,
                                                                   const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  check(recording, options);
  SynchronousOptions all = options;
  for (std::size_t c = 0; all.channels.empty() && c < recording.channels.size(); ++c) {
    if (recording.channels[c].role == recording::Role::vibration) all.channels.push_back(c);
  }
  const Averager averager(reader, range, curve, all);
  if (averager.blocks() < least_blocks) return too_few(averager.blocks(), all.turns_per_block);

  std::vector<Sums> whole = averager.none();
  std::size_t done = 0;
  base::for_ranges(
      context, averager.blocks(), averager.grain(),
      [&](std::size_t begin, std::size_t end) { return averager.sums(begin, end); },
      [&](const std::vector<Sums>& part) {
        for (std::size_t c = 0; c < whole.size(); ++c) whole[c].merge(part[c]);
        done = std::min(done + averager.grain(), averager.blocks());
        context.report("averaging turns", static_cast<double>(done) / static_cast<double>(averager.blocks()));
      });
  std::vector<SynchronousAverage> averages;
  for (std::size_t c = 0; c < whole.size(); ++c) {
    averages.push_back(averager.average(whole[c], recording.channels[all.channels[c]]));
  }
  return averages;
}

base::Answer<Synchronous> synchronous_average(const recording::Reader& reader, const SynchronousSettings& settings,
                                              const base::Context& context) {
  auto part = tacho_part(reader, settings.time_s, settings.tacho_channel, settings.tacho, context);
  if (!part) return part.refusal();
  SpeedCurve curve(part->pulses);
  auto averages = synchronous_averages(reader, part->range, curve, settings.average, context);
  if (!averages) return averages.refusal();
  return Synchronous{std::move(part->pulses), std::move(curve), std::move(*averages), std::move(part->findings)};
}

}  // namespace stillmass::rotation
