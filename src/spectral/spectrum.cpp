#include "stillmass/spectral/spectrum.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>
#include <utility>

#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

namespace {

BlockPlan plan_for(const recording::Recording& recording, recording::FrameRange range, const SpectrumOptions& options) {
  const std::size_t length = options.block_frames != 0
                                 ? options.block_frames
                                 : block_length(recording, range, options.resolution_hz, options.overlap);
  return BlockPlan::overlapping(recording, range, length, options.overlap);
}

}  // namespace

double Spectrum::amplitude_rms(std::size_t k) const { return std::sqrt(density[k] * noise_bandwidth_hz); }

SpectrumConsumer::SpectrumConsumer(const recording::Recording& recording, recording::FrameRange range,
                                   const SpectrumOptions& options)
    : SpectrumConsumer(recording, plan_for(recording, range, options), options.window, options.averaging) {}

SpectrumConsumer::SpectrumConsumer(const recording::Recording& recording, BlockPlan plan, Window window,
                                   Averaging averaging)
    : BlockConsumer(std::move(plan)),
      setup_(std::make_shared<const Setup>(Setup{recording.rate_hz, recording.channels, window, averaging})),
      transform_(samples(window, this->plan().length())),
      sums_(recording.channels.size()) {}

SpectrumConsumer::SpectrumConsumer(const SpectrumConsumer& whole, recording::FrameRange owned)
    : BlockConsumer(whole, owned), setup_(whole.setup_), transform_(whole.transform_), sums_(whole.sums_.size()) {}

std::unique_ptr<recording::Consumer> SpectrumConsumer::fresh(recording::FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new SpectrumConsumer(*this, owned));
}

void SpectrumConsumer::take_block(const Block& block) {
  const bool hold = setup_->averaging == Averaging::peak_hold;
  for (std::size_t c = 0; c < sums_.size(); ++c) {
    if (!block.is_valid(c)) continue;
    Sums& sums = sums_[c];
    if (sums.used.empty()) {
      sums.power.assign(transform_.lines(), 0.0);
      sums.power_squared.assign(hold ? 0 : transform_.lines(), 0.0);
    }
    append(sums.used, {block.first_frame, 1, 1});
    const auto x = transform_(block.channel(c));
    double* power = sums.power.data();
    double* power_squared = sums.power_squared.data();
    for (std::size_t k = 0; k < x.size(); ++k) {
      const double p = x[k].real() * x[k].real() + x[k].imag() * x[k].imag();
      if (hold) {
        power[k] = std::max(power[k], p);
      } else {
        power[k] += p;
        power_squared[k] += p * p;
      }
    }
  }
}

void SpectrumConsumer::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<SpectrumConsumer&>(next);
  const bool hold = setup_->averaging == Averaging::peak_hold;
  for (std::size_t c = 0; c < sums_.size(); ++c) {
    Sums& mine = sums_[c];
    Sums& theirs = other.sums_[c];
    if (theirs.used.empty()) continue;
    if (mine.used.empty()) {
      mine = std::move(theirs);
      continue;
    }
    for (std::size_t k = 0; k < mine.power.size(); ++k) {
      mine.power[k] = hold ? std::max(mine.power[k], theirs.power[k]) : mine.power[k] + theirs.power[k];
    }
    std::transform(mine.power_squared.begin(), mine.power_squared.end(), theirs.power_squared.begin(),
                   mine.power_squared.begin(), std::plus<>());
    for (const BlockRun& run : theirs.used) append(mine.used, run);
  }
}

std::vector<Spectrum> SpectrumConsumer::spectra() const {
  std::vector<Spectrum> all;
  for (std::size_t c = 0; c < sums_.size(); ++c) all.push_back(spectrum(c));
  return all;
}

Spectrum SpectrumConsumer::spectrum(std::size_t channel) const {
  const Sums& sums = sums_[channel];
  const std::size_t n = transform_.length();
  const auto w = transform_.weights();
  const double norm = std::inner_product(w.begin(), w.end(), w.begin(), 0.0);
  const Averages count = averages(setup_->window, n, sums.used);

  Spectrum s;
  s.channel = setup_->channels[channel].name;
  s.quantity = setup_->channels[channel].unit.quantity;
  s.rate_hz = setup_->rate_hz;
  s.line_hz = setup_->rate_hz / static_cast<double>(n);
  s.window = setup_->window;
  s.averaging = setup_->averaging;
  s.noise_bandwidth_hz = noise_bandwidth_bins(w) * s.line_hz;
  s.blocks = static_cast<std::size_t>(count.blocks);
  s.effective_averages = count.effective;
  s.overlaps = count.overlaps;
  if (s.blocks == 0) return s;

  const bool hold = s.averaging == Averaging::peak_hold;
  const auto k_blocks = static_cast<double>(s.blocks);
  s.density = density_factors(n, s.rate_hz, norm);
  for (std::size_t k = 0; k < s.density.size(); ++k) s.density[k] *= hold ? sums.power[k] : sums.power[k] / k_blocks;
  if (!hold && s.blocks > 1) {
    s.spread.resize(s.density.size());
    for (std::size_t k = 0; k < s.spread.size(); ++k) {
      const double mean = sums.power[k] / k_blocks;
      const double variance = (sums.power_squared[k] - k_blocks * mean * mean) / (k_blocks - 1.0);
      s.spread[k] = mean > 0.0 ? std::sqrt(std::max(variance, 0.0)) / mean : 0.0;
    }
  }
  return s;
}

std::vector<Spectrum> averaged_spectra(const recording::Reader& reader, recording::FrameRange range,
                                       const SpectrumOptions& options, const base::Context& context) {
  SpectrumConsumer consumer(reader.recording(), range, options);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, range, consumers, context, "spectra");
  return consumer.spectra();
}

Spectrum averaged_spectrum(std::span<const double> samples, double rate_hz, base::Quantity quantity,
                           const SpectrumOptions& options) {
  const auto frames = static_cast<std::int64_t>(samples.size());
  recording::Recording recording;
  recording.rate_hz = rate_hz;
  recording.frames = frames;
  recording.channels.resize(1);
  recording.channels.front().unit = base::si_unit(quantity);
  recording.segments.push_back({0, frames, 0.0});

  recording::Chunk chunk;
  chunk.resize(1, samples.size());
  std::copy(samples.begin(), samples.end(), chunk.channel(0).begin());
  SpectrumConsumer whole(recording, {0, frames}, options);
  const auto partial = whole.fresh({0, frames});
  partial->take(chunk);
  whole.merge(*partial);
  return whole.spectra().front();
}

}  // namespace stillmass::spectral
