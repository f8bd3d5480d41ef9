#include "stillmass/spectral/cross_spectrum.hpp"

#include <algorithm>
#include <array>
#include <numeric>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/averages.hpp"
#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

namespace {

BlockPlan plan_for(const recording::Recording& recording, recording::FrameRange range, const SpectrumOptions& options) {
  if (options.averaging != Averaging::mean) {
    throw base::usage_error({}, "a cross-spectrum with peak hold", "average it instead");
  }
  const std::size_t length = options.block_frames != 0
                                 ? options.block_frames
                                 : block_length(recording, range, options.resolution_hz, options.overlap);
  return BlockPlan::overlapping(recording, range, length, options.overlap);
}

void check_channels(const recording::Recording& recording, const ReferenceAndOutputs& which) {
  const auto check = [&](std::size_t channel) {
    if (channel >= recording.channels.size()) {
      throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", channel + 1),
                              fmt::format("it has {}", recording.channels.size()));
    }
  };
  check(which.reference);
  for (const std::size_t output : which.outputs) check(output);
}

double sum_of_squares(std::span<const double> w) { return std::inner_product(w.begin(), w.end(), w.begin(), 0.0); }

/// Mean over the first `frames` samples, 0 for none of them.
double mean_of_first(std::span<const double> block, std::size_t frames) {
  const auto head = block.first(std::min(frames, block.size()));
  return head.empty() ? 0.0 : std::accumulate(head.begin(), head.end(), 0.0) / static_cast<double>(head.size());
}

template <class T>
void add(std::vector<T>& sum, const std::vector<T>& more) {
  std::transform(sum.begin(), sum.end(), more.begin(), sum.begin(), std::plus<>());
}

}  // namespace

CrossSpectrumConsumer::CrossSpectrumConsumer(const recording::Recording& recording, recording::FrameRange range,
                                             ReferenceAndOutputs channels, const SpectrumOptions& options)
    : BlockConsumer(plan_for(recording, range, options)),
      reference_transform_(samples(options.window, plan().length())),
      output_transform_(reference_transform_),
      sums_(channels.outputs.size()) {
  check_channels(recording, channels);
  setup_ = std::make_shared<const Setup>(Setup{.rate_hz = recording.rate_hz,
                                               .channels = recording.channels,
                                               .which = std::move(channels),
                                               .window = options.window,
                                               .norm = sum_of_squares(reference_transform_.weights()),
                                               .pre_trigger = 0,
                                               .decay_s = std::nullopt});
}

CrossSpectrumConsumer::CrossSpectrumConsumer(const recording::Recording& recording, BlockPlan plan,
                                             ReferenceAndOutputs channels, const HitWindows& windows)
    : BlockConsumer(std::move(plan)),
      reference_transform_(force_weights(windows, this->plan().length(), recording.rate_hz)),
      output_transform_(response_weights(windows, this->plan().length(), recording.rate_hz)),
      sums_(channels.outputs.size()) {
  check_channels(recording, channels);
  setup_ = std::make_shared<const Setup>(Setup{.rate_hz = recording.rate_hz,
                                               .channels = recording.channels,
                                               .which = std::move(channels),
                                               .window = Window::rectangle,
                                               .norm = static_cast<double>(this->plan().length()),
                                               .pre_trigger = windows.pre_trigger,
                                               .decay_s = windows.decay_s});
}

CrossSpectrumConsumer::CrossSpectrumConsumer(const CrossSpectrumConsumer& whole, recording::FrameRange owned)
    : BlockConsumer(whole, owned),
      setup_(whole.setup_),
      reference_transform_(whole.reference_transform_),
      output_transform_(whole.output_transform_),
      sums_(whole.sums_.size()) {}

std::unique_ptr<recording::Consumer> CrossSpectrumConsumer::fresh(recording::FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new CrossSpectrumConsumer(*this, owned));
}

void CrossSpectrumConsumer::take_block(const Block& block) {
  const auto& [reference, outputs] = setup_->which;
  if (!block.is_valid(reference)) return;
  const auto force = block.channel(reference);
  const auto x = reference_transform_(force, mean_of_first(force, setup_->pre_trigger));
  for (std::size_t i = 0; i < outputs.size(); ++i) {
    if (!block.is_valid(outputs[i])) continue;
    Sums& sums = sums_[i];
    if (sums.used.empty()) {
      sums.reference.assign(x.size(), 0.0);
      sums.output.assign(x.size(), 0.0);
      sums.cross.assign(x.size(), {});
    }
    append(sums.used, {block.first_frame, 1, 1});
    const auto response = block.channel(outputs[i]);
    const auto y = output_transform_(response, mean_of_first(response, setup_->pre_trigger));
    for (std::size_t k = 0; k < x.size(); ++k) {
      const double xr = x[k].real(), xi = x[k].imag();
      const double yr = y[k].real(), yi = y[k].imag();
      sums.reference[k] += xr * xr + xi * xi;
      sums.output[k] += yr * yr + yi * yi;
      sums.cross[k] += std::complex<double>(xr * yr + xi * yi, xr * yi - xi * yr);
    }
  }
}

void CrossSpectrumConsumer::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<CrossSpectrumConsumer&>(next);
  for (std::size_t i = 0; i < sums_.size(); ++i) {
    Sums& mine = sums_[i];
    Sums& theirs = other.sums_[i];
    if (theirs.used.empty()) continue;
    if (mine.used.empty()) {
      mine = std::move(theirs);
      continue;
    }
    add(mine.reference, theirs.reference);
    add(mine.output, theirs.output);
    add(mine.cross, theirs.cross);
    for (const BlockRun& run : theirs.used) append(mine.used, run);
  }
}

std::vector<CrossSpectrum> CrossSpectrumConsumer::spectra() const {
  const std::size_t n = plan().length();
  const auto factors = density_factors(n, setup_->rate_hz, setup_->norm);
  const recording::Channel& reference = setup_->channels[setup_->which.reference];
  std::vector<CrossSpectrum> all;
  for (std::size_t i = 0; i < sums_.size(); ++i) {
    const recording::Channel& output = setup_->channels[setup_->which.outputs[i]];
    const Averages count = averages(setup_->window, n, sums_[i].used);
    CrossSpectrum s{.reference = reference.name,
                    .output = output.name,
                    .reference_quantity = reference.unit.quantity,
                    .output_quantity = output.unit.quantity,
                    .rate_hz = setup_->rate_hz,
                    .line_hz = setup_->rate_hz / static_cast<double>(n),
                    .reference_density = sums_[i].reference,
                    .output_density = sums_[i].output,
                    .cross = sums_[i].cross,
                    .window = setup_->window,
                    .blocks = static_cast<std::size_t>(count.blocks),
                    .effective_averages = count.effective,
                    .decay_s = setup_->decay_s};
    for (std::size_t k = 0; k < s.cross.size(); ++k) {
      const double factor = factors[k] / static_cast<double>(s.blocks);
      s.reference_density[k] *= factor;
      s.output_density[k] *= factor;
      s.cross[k] *= factor;
    }
    all.push_back(std::move(s));
  }
  return all;
}

std::vector<CrossSpectrum> cross_spectra(const recording::Reader& reader, recording::FrameRange range,
                                         const ReferenceAndOutputs& channels, const SpectrumOptions& options,
                                         const base::Context& context) {
  CrossSpectrumConsumer consumer(reader.recording(), range, channels, options);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, range, consumers, context, "cross-spectra");
  return consumer.spectra();
}

}  // namespace stillmass::spectral
