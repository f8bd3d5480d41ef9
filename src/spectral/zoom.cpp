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

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

constexpr std::size_t least_points = 16;

std::int64_t longest_part(const Recording& recording, FrameRange range) {
  std::int64_t longest = 0;
  for (const recording::Segment& s : recording.segments) {
    const FrameRange part{std::max(s.first_frame, range.begin), std::min(s.first_frame + s.frames, range.end)};
    longest = std::max(longest, part.size());
  }
  return longest;
}

std::vector<std::size_t> chosen(const Recording& recording, std::vector<std::size_t> channels) {
  if (channels.empty()) {
    channels.resize(recording.channels.size());
    std::iota(channels.begin(), channels.end(), std::size_t{0});
  }
  for (const std::size_t c : channels) {
    if (c >= recording.channels.size()) {
      throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", c + 1),
                              fmt::format("it has {}", recording.channels.size()));
    }
  }
  return channels;
}

/// The base band and the points of a block in it.
struct Layout {
  BaseBand band;
  std::size_t points = 0;
  std::int64_t centre_number = 0;  ///< of the line at the centre

  double line_hz() const { return band.low_rate_hz() / static_cast<double>(points); }
};

void check(const Recording& recording, const ZoomOptions& options) {
  const base::Interval band = options.band_hz;
  const double half = 0.5 * recording.rate_hz;
  if (!(band.lo >= 0.0 && band.lo < band.hi && band.hi <= half)) {
    throw base::usage_error(recording.file.string(), fmt::format("a zoom from {} to {} Hz", band.lo, band.hi),
                            fmt::format("a band lies between 0 and {:.6g} Hz", half));
  }
  if (!(options.resolution_hz >= 0.0 && options.resolution_hz < band.width())) {
    throw base::usage_error(recording.file.string(), fmt::format("a resolution of {} Hz", options.resolution_hz),
                            fmt::format("lines can be up to {:.6g} Hz apart in that band", band.width()));
  }
  if (!(options.overlap >= 0.0 && options.overlap <= 0.95)) {
    throw base::usage_error({}, fmt::format("an overlap of {}", options.overlap),
                            "the overlap is a fraction, 0 to 0.95");
  }
  if (options.most_points < least_points) {
    throw base::usage_error({}, fmt::format("a block of {} points", options.most_points),
                            fmt::format("it has {} at least", least_points));
  }
}

Layout layout(const Recording& recording, FrameRange range, const ZoomOptions& options) {
  check(recording, options);
  const double rate = recording.rate_hz;
  const double width = options.band_hz.width();
  const std::int64_t frames = longest_part(recording, range);
  const double longest_s = static_cast<double>(frames) / rate;
  const auto most = static_cast<double>(options.most_points);
  const auto no_block = [&](double finest_hz) {
    return base::usage_error(recording.file.string(),
                             fmt::format("lines {:.3g} Hz apart from {:g} to {:g} Hz cannot be had",
                                         options.resolution_hz, options.band_hz.lo, options.band_hz.hi),
                             fmt::format("the finest are {:.3g} Hz apart", finest_hz));
  };
  if (frames < static_cast<std::int64_t>(least_points)) {
    throw base::usage_error(recording.file.string(),
                            fmt::format("no gapless part of the range holds {} samples", least_points),
                            "analyse a longer part");
  }
  double block_s = options.resolution_hz > 0.0 ? 1.0 / options.resolution_hz : longest_s;
  if (options.resolution_hz == 0.0) block_s = std::min(block_s, most / (1.5 * width));
  const double transition = std::min(transition_for(width, block_s), std::max(0.5 * width, most / block_s - width));

  Layout result;
  // A line more on each side: the centre is put on a line.
  result.band = base_band(rate, options.band_hz.middle(), 0.5 * width + 1.0 / block_s, transition);
  const std::int64_t room = result.band.samples_in(frames);
  const double low_rate = result.band.low_rate_hz();
  const std::size_t held = static_cast<std::size_t>(std::min<std::int64_t>(room, static_cast<std::int64_t>(most)));
  if (options.resolution_hz > 0.0) {
    const double wanted = std::ceil(low_rate / options.resolution_hz - 1e-9);
    result.points = fast_length_at_least(static_cast<std::size_t>(std::min(wanted, 2.0 * most)));
    if (result.points > held) throw no_block(low_rate / std::max(1.0, static_cast<double>(held)));
  } else {
    if (held < least_points) {
      throw base::usage_error(recording.file.string(), "the range is too short for a zoom into that band",
                              "take a wider band or a longer part");
    }
    result.points = fast_length_at_most(held);
  }
  result.centre_number = std::llround(options.band_hz.middle() / result.line_hz());
  const double centre = static_cast<double>(result.centre_number) * result.line_hz();
  result.band = base_band(rate, centre, 0.5 * width + 1.0 / block_s, transition);
  return result;
}

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
  Layout layout;
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
  const auto channels = chosen(recording, options.channels);
  Layout found = layout(recording, range, options);
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
