#include "stillmass/spectral/envelope.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/averages.hpp"

#include "spectral/band_filter.hpp"

namespace stillmass::spectral {

namespace {

constexpr double flank_share = 0.125;  // of the width of the band
constexpr double least_lines = 8.0;    // in a band: fewer give no envelope that varies within a block

BlockPlan plan_for(const recording::Recording& recording, recording::FrameRange range, const SpectrumOptions& options) {
  if (options.averaging != Averaging::mean) {
    throw base::usage_error({}, "an envelope spectrum with peak hold", "average it instead");
  }
  const std::size_t length = options.block_frames != 0
                                 ? options.block_frames
                                 : block_length(recording, range, options.resolution_hz, options.overlap);
  return BlockPlan::overlapping(recording, range, length, options.overlap);
}

void check_band(const recording::Recording& recording, const EnvelopeBand& band, double line_hz) {
  if (band.channel >= recording.channels.size()) {
    throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", band.channel + 1),
                            fmt::format("it has {}", recording.channels.size()));
  }
  const base::Interval& hz = band.band_hz;
  if (!(hz.lo > 0.0 && hz.lo < hz.hi && hz.hi < 0.5 * recording.rate_hz)) {
    throw base::usage_error(
        {}, fmt::format("an envelope band from {:.6g} to {:.6g} Hz", hz.lo, hz.hi),
        fmt::format("it lies between 0 and {:.6g} Hz, half the sampling rate", 0.5 * recording.rate_hz));
  }
  if (hz.width() < least_lines * line_hz) {
    throw base::usage_error(
        {}, fmt::format("an envelope band of {:.4g} Hz", hz.width()),
        fmt::format("it is at least {:.4g} Hz wide with lines {:.4g} Hz apart", least_lines * line_hz, line_hz));
  }
}

template <class T>
void add(std::vector<T>& sum, const std::vector<T>& more) {
  std::transform(sum.begin(), sum.end(), more.begin(), sum.begin(), std::plus<>());
}

}  // namespace

struct EnvelopeConsumer::Setup {
  struct Band {
    EnvelopeBand what;
    recording::Channel channel;
    BandFilter filter;
    std::size_t lines;  ///< of the envelope spectrum
    std::vector<double> weights;
  };
  double rate_hz = 0.0;
  Window window = Window::hann;
  std::size_t frames = 0;
  std::vector<Band> bands;
};

struct EnvelopeConsumer::Workspace {
  struct Band {
    explicit Band(const Setup::Band& setup)
        : fft(setup.filter.samples()), envelope(setup.filter.samples()), transform(setup.weights) {}
    ComplexFft fft;
    std::vector<double> envelope;
    BlockTransform transform;
  };
  explicit Workspace(const Setup& setup) : block_transform(std::vector<double>(setup.frames, 1.0)) {
    bands.reserve(setup.bands.size());
    for (const Setup::Band& band : setup.bands) bands.push_back(std::make_unique<Band>(band));
  }
  BlockTransform block_transform;
  std::vector<std::unique_ptr<Band>> bands;
};

struct EnvelopeConsumer::Sums {
  std::vector<double> power;          ///< of |E|^2 per line
  std::vector<double> power_squared;  ///< of |E|^4
  double mean = 0.0;                  ///< of the blocks' weighted means of the envelope, and of their squares
  double mean_squared = 0.0;
  double second = 0.0;  ///< of the blocks' weighted means of the envelope's square and fourth power
  double fourth = 0.0;
  std::vector<BlockRun> used;
};

EnvelopeConsumer::EnvelopeConsumer(const recording::Recording& recording, recording::FrameRange range,
                                   const std::vector<EnvelopeBand>& bands, const EnvelopeOptions& options)
    : BlockConsumer(plan_for(recording, range, options.spectrum)), sums_(bands.size()) {
  if (!(std::isfinite(options.highest_hz) && options.highest_hz > 0.0)) {
    throw base::usage_error({}, fmt::format("an envelope spectrum up to {} Hz", options.highest_hz),
                            "give a frequency");
  }
  auto setup = std::make_shared<Setup>();
  setup->rate_hz = recording.rate_hz;
  setup->window = options.spectrum.window;
  setup->frames = plan().length();
  const double line = recording.rate_hz / static_cast<double>(setup->frames);
  for (const EnvelopeBand& band : bands) {
    check_band(recording, band, line);
    const double width = band.band_hz.width();
    const double flank = std::max(flank_share * width, 2.0 * line);
    // The square of the envelope reaches to width + flank: twice that many real samples a second hold it.
    BandFilter filter(setup->frames, recording.rate_hz, band.band_hz, flank, 2.0 * (width + flank));
    const double highest = std::min(options.highest_hz, width);
    const auto lines = static_cast<std::size_t>(std::max(std::floor(highest / line), 4.0)) + 1;
    auto weights = samples(setup->window, filter.samples());
    setup->bands.push_back({band, recording.channels[band.channel], std::move(filter), lines, std::move(weights)});
  }
  setup_ = std::move(setup);
}

EnvelopeConsumer::EnvelopeConsumer(const EnvelopeConsumer& whole, recording::FrameRange owned)
    : BlockConsumer(whole, owned),
      setup_(whole.setup_),
      workspace_(std::make_unique<Workspace>(*whole.setup_)),
      sums_(whole.sums_.size()) {}

EnvelopeConsumer::~EnvelopeConsumer() = default;

std::unique_ptr<recording::Consumer> EnvelopeConsumer::fresh(recording::FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new EnvelopeConsumer(*this, owned));
}

void EnvelopeConsumer::take_block(const Block& block) {
  for (std::size_t b = 0; b < sums_.size(); ++b) {
    const Setup::Band& band = setup_->bands[b];
    if (!block.is_valid(band.what.channel)) continue;
    Workspace::Band& work = *workspace_->bands[b];
    Sums& sums = sums_[b];
    if (sums.used.empty()) {
      sums.power.assign(band.lines, 0.0);
      sums.power_squared.assign(band.lines, 0.0);
    }
    append(sums.used, {block.first_frame, 1, 1});
    const std::span<double> envelope(work.envelope);
    band.filter.squared_envelope(workspace_->block_transform(block.channel(band.what.channel)), work.fft, envelope);
    double weight = 0.0, mean = 0.0, second = 0.0, fourth = 0.0;
    for (std::size_t i = 0; i < envelope.size(); ++i) {
      const double w = band.weights[i];
      const double square = envelope[i];
      envelope[i] = std::sqrt(square);
      weight += w;
      mean += w * envelope[i];
      second += w * square;
      fourth += w * square * square;
    }
    mean /= weight;
    sums.mean += mean;
    sums.mean_squared += mean * mean;
    sums.second += second / weight;
    sums.fourth += fourth / weight;
    const auto lines = work.transform(envelope, mean);
    for (std::size_t k = 0; k < band.lines; ++k) {
      const double p = lines[k].real() * lines[k].real() + lines[k].imag() * lines[k].imag();
      sums.power[k] += p;
      sums.power_squared[k] += p * p;
    }
  }
}

void EnvelopeConsumer::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<EnvelopeConsumer&>(next);
  for (std::size_t b = 0; b < sums_.size(); ++b) {
    Sums& mine = sums_[b];
    Sums& theirs = other.sums_[b];
    if (theirs.used.empty()) continue;
    if (mine.used.empty()) {
      mine = std::move(theirs);
      continue;
    }
    add(mine.power, theirs.power);
    add(mine.power_squared, theirs.power_squared);
    mine.mean += theirs.mean;
    mine.mean_squared += theirs.mean_squared;
    mine.second += theirs.second;
    mine.fourth += theirs.fourth;
    for (const BlockRun& run : theirs.used) append(mine.used, run);
  }
}

std::vector<Envelope> EnvelopeConsumer::envelopes() const {
  std::vector<Envelope> all;
  for (std::size_t b = 0; b < sums_.size(); ++b) {
    const Setup::Band& band = setup_->bands[b];
    const Sums& sums = sums_[b];
    const auto& w = band.weights;
    const Averages count = averages(setup_->window, setup_->frames, sums.used);
    Envelope e;
    e.channel = band.channel.name;
    e.band_hz = band.what.band_hz;
    Spectrum& s = e.spectrum;
    s.channel = band.channel.name;
    s.quantity = band.channel.unit.quantity;
    s.line_hz = setup_->rate_hz / static_cast<double>(setup_->frames);
    s.rate_hz = 2.0 * static_cast<double>(band.lines - 1) * s.line_hz;
    s.window = setup_->window;
    s.noise_bandwidth_hz = noise_bandwidth_bins(w) * s.line_hz;
    s.blocks = static_cast<std::size_t>(count.blocks);
    s.effective_averages = count.effective;
    s.overlaps = count.overlaps;
    e.mean.quantity = s.quantity;
    if (s.blocks == 0) {
      all.push_back(std::move(e));
      continue;
    }
    const auto blocks = static_cast<double>(s.blocks);
    const double norm = std::inner_product(w.begin(), w.end(), w.begin(), 0.0);
    const double factor = 2.0 / (s.line_hz * static_cast<double>(w.size()) * norm);
    for (std::size_t k = 0; k < band.lines; ++k) {
      const double mean = sums.power[k] / blocks;
      s.density.push_back(factor * mean);
      if (s.blocks < 2) continue;
      const double variance = (sums.power_squared[k] - blocks * mean * mean) / (blocks - 1.0);
      s.spread.push_back(mean > 0.0 ? std::sqrt(std::max(variance, 0.0)) / mean : 0.0);
    }
    s.density.front() *= 0.5;
    e.mean.value = sums.mean / blocks;
    if (s.blocks > 1) {
      const double variance =
          std::max((sums.mean_squared - blocks * e.mean.value * e.mean.value) / (blocks - 1.0), 0.0);
      double pairs = blocks;  // means of overlapping blocks go together
      for (const Overlap& overlap : count.overlaps) {
        const auto lag = static_cast<std::size_t>(std::lround(overlap.lag * static_cast<double>(w.size())));
        pairs += 2.0 * overlap.pairs * std::max(overlap_correlation(w, lag), 0.0);
      }
      e.mean.u = std::sqrt(variance * pairs) / blocks;
      e.mean.dof = std::max(count.effective - 1.0, 1.0);
    }
    e.kurtosis = sums.second > 0.0 ? blocks * sums.fourth / (sums.second * sums.second) - 2.0 : 0.0;
    all.push_back(std::move(e));
  }
  return all;
}

}  // namespace stillmass::spectral
