#include "stillmass/spectral/spectrum.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <numeric>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/block_choice.hpp"

namespace stillmass::spectral {

namespace {

struct Named {
  Averaging averaging;
  std::string_view name;
};
constexpr std::array kinds{Named{Averaging::mean, "mean"}, Named{Averaging::peak_hold, "peak-hold"},
                           Named{Averaging::exponential, "exponential"}};

/// What the sums of the blocks before are multiplied by when another block comes.
double decay_of(Averaging averaging, double exponential_averages) {
  if (averaging != Averaging::exponential) return 1.0;
  if (!(exponential_averages >= 1.0 && std::isfinite(exponential_averages))) {
    throw base::usage_error({}, fmt::format("an exponential average over {} blocks", exponential_averages),
                            "give a number of 1 or more");
  }
  return 1.0 - 1.0 / exponential_averages;
}

// One loop a kind, so that the compiler makes vector code of each.
void add_block(std::span<const std::complex<double>> x, double* power, double* power_squared) {
  for (std::size_t k = 0; k < x.size(); ++k) {
    const double p = x[k].real() * x[k].real() + x[k].imag() * x[k].imag();
    power[k] += p;
    power_squared[k] += p * p;
  }
}

void add_block(std::span<const std::complex<double>> x, double decay, double* power, double* power_squared) {
  for (std::size_t k = 0; k < x.size(); ++k) {
    const double p = x[k].real() * x[k].real() + x[k].imag() * x[k].imag();
    power[k] = decay * power[k] + p;
    power_squared[k] = decay * power_squared[k] + p * p;
  }
}

void hold_block(std::span<const std::complex<double>> x, double* power) {
  for (std::size_t k = 0; k < x.size(); ++k) {
    power[k] = std::max(power[k], x[k].real() * x[k].real() + x[k].imag() * x[k].imag());
  }
}

std::int64_t blocks_of(std::span<const BlockRun> runs) {
  return std::accumulate(runs.begin(), runs.end(), std::int64_t{0},
                         [](std::int64_t sum, const BlockRun& run) { return sum + run.count; });
}

}  // namespace

std::string_view name(Averaging averaging) {
  return std::find_if(kinds.begin(), kinds.end(), [=](const Named& n) { return n.averaging == averaging; })->name;
}

std::optional<Averaging> averaging_named(std::string_view name) {
  const auto found = std::find_if(kinds.begin(), kinds.end(), [=](const Named& n) { return n.name == name; });
  return found == kinds.end() ? std::nullopt : std::optional(found->averaging);
}

double Spectrum::amplitude_rms(std::size_t k) const { return std::sqrt(density[k] * noise_bandwidth_hz); }

SpectrumConsumer::SpectrumConsumer(const recording::Recording& recording, recording::FrameRange range,
                                   const SpectrumOptions& options)
    : SpectrumConsumer(
          recording,
          BlockPlan::overlapping(recording, range, choose_block(recording, range, options).length, options.overlap),
          options.window, options.averaging, options.exponential_averages) {}

SpectrumConsumer::SpectrumConsumer(const recording::Recording& recording, BlockPlan plan, Window window,
                                   Averaging averaging, double exponential_averages)
    : BlockConsumer(std::move(plan)),
      setup_(std::make_shared<const Setup>(
          Setup{recording.rate_hz, recording.channels, window, averaging, decay_of(averaging, exponential_averages)})),
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
    if (hold) {
      hold_block(x, sums.power.data());
    } else if (setup_->decay == 1.0) {
      add_block(x, sums.power.data(), sums.power_squared.data());
    } else {
      add_block(x, setup_->decay, sums.power.data(), sums.power_squared.data());
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
    // What came before weighs less by every block since.
    const double weight =
        setup_->decay == 1.0 ? 1.0 : std::pow(setup_->decay, static_cast<double>(blocks_of(theirs.used)));
    const auto joined = [=](double before, double after) {
      return hold ? std::max(before, after) : weight * before + after;
    };
    std::transform(mine.power.begin(), mine.power.end(), theirs.power.begin(), mine.power.begin(), joined);
    std::transform(mine.power_squared.begin(), mine.power_squared.end(), theirs.power_squared.begin(),
                   mine.power_squared.begin(), joined);
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
  const Averages count = averages(setup_->window, n, sums.used, setup_->decay);

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
  // Sum of the weights, and the blocks of equal weight that scatter as much: both the number of blocks for a mean.
  const double q = setup_->decay;
  const double fallen = q == 1.0 ? 0.0 : std::pow(q, k_blocks);
  const double weights = q == 1.0 ? k_blocks : (1.0 - fallen) / (1.0 - q);
  const double equals = q == 1.0 ? k_blocks : weights * (1.0 + q) / (1.0 + fallen);
  s.density = density_factors(n, s.rate_hz, norm);
  for (std::size_t k = 0; k < s.density.size(); ++k) s.density[k] *= hold ? sums.power[k] : sums.power[k] / weights;
  if (!hold && equals > 1.0) {
    s.spread.resize(s.density.size());
    for (std::size_t k = 0; k < s.spread.size(); ++k) {
      const double mean = sums.power[k] / weights;
      const double variance = (sums.power_squared[k] / weights - mean * mean) * equals / (equals - 1.0);
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
