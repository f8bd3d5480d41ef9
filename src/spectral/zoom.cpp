#include "stillmass/spectral/zoom.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <complex>
#include <numeric>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/block_plan.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/base_band.hpp"
#include "spectral/fft.hpp"
#include "spectral/zoom_layout.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

/// True where a line is its own image: no second half of its power stands at the negative frequency.
bool is_at_end(double frequency_hz, double rate_hz) {
  const double nearness = 1e-9 * rate_hz;
  return std::abs(frequency_hz) < nearness || std::abs(frequency_hz - 0.5 * rate_hz) < nearness;
}

}  // namespace

double ZoomSpectrum::amplitude_rms(std::size_t k) const { return std::sqrt(density[k] * noise_bandwidth_hz); }

struct ZoomConsumer::Parts {
  struct Channel {
    std::string name;
    base::Quantity quantity = base::Quantity::acceleration;
    std::vector<std::complex<double>> held;  ///< samples from the next block's start on
    std::vector<double> power;
    std::vector<double> power_squared;
    std::vector<BlockRun> used;
  };

  explicit Parts(LowRateStream s) : stream(std::move(s)) {}

  void add(const LowRateRun& run);
  void transform(Channel& channel);
  ZoomSpectrum spectrum(const Channel& channel) const;

  LowRateStream stream;
  // Of the whole only, not of a partial:
  base::Interval band_hz;
  ZoomLayout layout;
  Window window = Window::hann;
  std::int64_t hop = 1;
  std::vector<double> weights;
  std::vector<Channel> channels;
  std::unique_ptr<ComplexFft> fft;
  std::int64_t first_line = 0;  ///< number of the first line of the band
  std::size_t lines = 0;
  std::size_t segment = static_cast<std::size_t>(-1);
  std::int64_t next = 0;         ///< number of the sample that comes next
  std::int64_t of_segment = 0;   ///< samples before the segment's first, over all segments
  std::int64_t block_start = 0;  ///< of held, in the segment
};

/// Samples behind those before; blocks start anew with each segment.
void ZoomConsumer::Parts::add(const LowRateRun& run) {
  if (run.channels.empty() || run.channels.front().empty()) return;
  if (run.segment != segment) {
    of_segment += next + static_cast<std::int64_t>(weights.size());  // blocks of two segments share nothing
    segment = run.segment;
    next = 0;
    block_start = 0;
    for (Channel& channel : channels) channel.held.clear();
  }
  const auto n = static_cast<std::ptrdiff_t>(weights.size());
  const std::size_t count = run.channels.front().size();
  std::size_t taken = 0;
  while (taken < count) {
    const std::size_t held = channels.front().held.size();
    const std::size_t more = std::min(count - taken, weights.size() - held);
    for (std::size_t c = 0; c < channels.size(); ++c) {
      const auto from = run.channels[c].begin() + static_cast<std::ptrdiff_t>(taken);
      channels[c].held.insert(channels[c].held.end(), from, from + static_cast<std::ptrdiff_t>(more));
    }
    taken += more;
    if (static_cast<std::ptrdiff_t>(channels.front().held.size()) < n) break;
    for (Channel& channel : channels) {
      transform(channel);
      channel.held.erase(channel.held.begin(), channel.held.begin() + static_cast<std::ptrdiff_t>(hop));
    }
    block_start += hop;
  }
  next += static_cast<std::int64_t>(count);
}

void ZoomConsumer::Parts::transform(Channel& channel) {
  const auto in = fft->values();
  for (std::size_t i = 0; i < in.size(); ++i) {
    in[i] = weights[i] * channel.held[i];
    if (std::isnan(in[i].real())) return;
  }
  fft->run();
  append(channel.used, {of_segment + block_start, 1, 1});
  const auto n = static_cast<std::int64_t>(in.size());
  for (std::size_t k = 0; k < lines; ++k) {
    const std::int64_t offset = first_line + static_cast<std::int64_t>(k) - layout.centre_number;
    const double p = std::norm(in[static_cast<std::size_t>(((offset % n) + n) % n)]);
    channel.power[k] += p;
    channel.power_squared[k] += p * p;
  }
}

ZoomSpectrum ZoomConsumer::Parts::spectrum(const Channel& channel) const {
  const Averages count = averages(window, weights.size(), channel.used);
  ZoomSpectrum s;
  s.channel = channel.name;
  s.quantity = channel.quantity;
  s.band_hz = band_hz;
  s.line_hz = layout.line_hz();
  s.first_number = first_line;
  s.window = window;
  s.noise_bandwidth_hz = noise_bandwidth_bins(weights) * s.line_hz;
  s.block_s = 1.0 / s.line_hz;
  s.blocks = static_cast<std::size_t>(count.blocks);
  s.effective_averages = count.effective;
  if (s.blocks == 0) return s;

  const auto blocks = static_cast<double>(s.blocks);
  const double norm = std::inner_product(weights.begin(), weights.end(), weights.begin(), 0.0);
  const double factor = 2.0 / (layout.band.low_rate_hz() * norm);
  for (std::size_t k = 0; k < lines; ++k) {
    const double mean = channel.power[k] / blocks;
    s.density.push_back((is_at_end(s.frequency(k), layout.band.rate_hz) ? 0.5 : 1.0) * factor * mean);
    if (s.blocks < 2) continue;
    const double variance = (channel.power_squared[k] - blocks * mean * mean) / (blocks - 1.0);
    s.spread.push_back(mean > 0.0 ? std::sqrt(std::max(variance, 0.0)) / mean : 0.0);
  }
  return s;
}

ZoomConsumer::ZoomConsumer(const Recording& recording, FrameRange range, const ZoomOptions& options) {
  const auto channels = zoom_channels(recording, options.channels);
  ZoomLayout found = zoom_layout(recording, range, options);
  parts_ =
      std::make_unique<Parts>(LowRateStream(std::make_shared<const BaseBand>(found.band), recording, range, channels));
  Parts& p = *parts_;
  p.band_hz = options.band_hz;
  p.layout = std::move(found);
  p.window = options.window;
  p.weights = samples(options.window, p.layout.points);
  const auto shared = static_cast<std::int64_t>(std::floor(options.overlap * static_cast<double>(p.layout.points)));
  p.hop = static_cast<std::int64_t>(p.layout.points) - shared;
  p.fft = std::make_unique<ComplexFft>(p.layout.points);
  constexpr double rounding = 1e-9;  // of a line: an end that is meant to be a line is one
  p.first_line = static_cast<std::int64_t>(std::ceil(options.band_hz.lo / p.layout.line_hz() - rounding));
  const auto last = static_cast<std::int64_t>(std::floor(options.band_hz.hi / p.layout.line_hz() + rounding));
  p.lines = static_cast<std::size_t>(std::max<std::int64_t>(last - p.first_line + 1, 0));
  for (const std::size_t c : channels) {
    Parts::Channel channel;
    channel.name = recording.channels[c].name;
    channel.quantity = recording.channels[c].unit.quantity;
    channel.power.assign(p.lines, 0.0);
    channel.power_squared.assign(p.lines, 0.0);
    p.channels.push_back(std::move(channel));
  }
}

ZoomConsumer::ZoomConsumer(std::unique_ptr<Parts> parts) : parts_(std::move(parts)) {}
ZoomConsumer::~ZoomConsumer() = default;

std::int64_t ZoomConsumer::lookahead() const { return parts_->stream.lookahead(); }

std::unique_ptr<recording::Consumer> ZoomConsumer::fresh(FrameRange owned) const {
  auto parts = std::make_unique<Parts>(LowRateStream(parts_->stream, owned));
  return std::unique_ptr<recording::Consumer>(new ZoomConsumer(std::move(parts)));
}

void ZoomConsumer::take(const recording::Chunk& chunk) { parts_->stream.take(chunk); }

void ZoomConsumer::merge(recording::Consumer& next) {
  auto& other = dynamic_cast<ZoomConsumer&>(next);
  for (const LowRateRun& run : other.parts_->stream.runs) parts_->add(run);
  other.parts_->stream.runs.clear();
}

std::vector<ZoomSpectrum> ZoomConsumer::spectra() const {
  std::vector<ZoomSpectrum> all;
  for (const Parts::Channel& channel : parts_->channels) all.push_back(parts_->spectrum(channel));
  return all;
}

std::vector<ZoomSpectrum> zoom(const recording::Reader& reader, FrameRange range, const ZoomOptions& options,
                               const base::Context& context) {
  ZoomConsumer consumer(reader.recording(), range, options);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, range, consumers, context, "zoom");
  return consumer.spectra();
}

ZoomSpectrum as_quantity(const ZoomSpectrum& zoom, base::Quantity to) {
  const auto integrations = integrations_between(zoom.quantity, to);
  if (!integrations) {
    throw base::usage_error(
        {}, fmt::format("a spectrum of {} cannot become {}", base::name(zoom.quantity), base::name(to)));
  }
  ZoomSpectrum result = zoom;
  result.quantity = to;
  if (*integrations == 0) return result;
  for (std::size_t k = 0; k < result.density.size(); ++k) {
    const double f = result.frequency(k);
    result.density[k] *= f > 0.0 ? std::norm(integration_factor(*integrations, f)) : 0.0;
  }
  return result;
}

}  // namespace stillmass::spectral
