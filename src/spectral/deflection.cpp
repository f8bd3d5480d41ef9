#include "stillmass/spectral/deflection.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

#include "spectral/deflection_sums.hpp"

namespace stillmass::spectral {

namespace {

BlockPlan plan_for(const recording::Recording& recording, recording::FrameRange range,
                   const std::vector<double>& frequencies_hz, const DeflectionOptions& options) {
  if (frequencies_hz.empty()) throw base::usage_error({}, "deflections at no frequency", "name at least one");
  if (!(options.wander >= 0.0 && options.wander <= 0.1)) {
    throw base::usage_error({}, fmt::format("a frequency that wanders by {} of itself", options.wander),
                            "give a share from 0 to 0.1");
  }
  std::size_t length = options.block_frames;
  if (length == 0) {
    length = block_length(recording, range, options.resolution_hz, options.overlap);
    const double lowest = *std::min_element(frequencies_hz.begin(), frequencies_hz.end());
    const double line = recording.rate_hz / static_cast<double>(length);
    if (options.resolution_hz == 0.0 && lowest > 0.0 && line > lowest / 16.0) {
      length = block_length(recording, range, lowest / 16.0, options.overlap);
    }
  }
  return BlockPlan::overlapping(recording, range, length, options.overlap);
}

bool takes_part(const recording::Channel& channel) {
  return channel.role == recording::Role::vibration && base::is_motion(channel.unit.quantity);
}

template <class T>
void add_to(std::vector<T>& sum, const std::vector<T>& more) {
  std::transform(sum.begin(), sum.end(), more.begin(), sum.begin(), std::plus<>());
}

}  // namespace

void PairSums::start(std::size_t channels) {
  cross.assign(channels * channels, {});
  power.assign(channels * channels, 0.0);
}

void PairSums::add(std::span<const std::complex<double>> values, std::span<const char> valid) {
  const std::size_t n = values.size();
  for (std::size_t i = 0; i < n; ++i) {
    if (valid[i] == 0) continue;
    const double a = values[i].real(), b = values[i].imag();
    for (std::size_t j = 0; j < n; ++j) {
      if (valid[j] == 0) continue;
      power[i * n + j] += a * a + b * b;
      if (j <= i) continue;
      const double c = values[j].real(), d = values[j].imag();
      cross[i * n + j] += std::complex<double>(a * c + b * d, a * d - b * c);
    }
  }
}

void PairSums::merge(const PairSums& next) {
  add_to(cross, next.cross);
  add_to(power, next.power);
}

namespace {

struct Room {
  std::size_t lobe = 0;
  std::size_t reach = 0;  ///< lines of the peak on each side of its middle
  bool is_there = false;
};

Room room_for(double place, std::size_t lines, Window window, double wander) {
  Room room;
  room.lobe = static_cast<std::size_t>(lobe_bins(window));
  const bool is_within = place > 0.0 && place < static_cast<double>(lines);  // not for NaN
  room.reach = room.lobe - 1 + static_cast<std::size_t>(is_within ? std::ceil(wander * place - 1e-9) : 0.0);
  room.is_there = is_within && place >= static_cast<double>(room.lobe + room.reach) - 0.5 &&
                  place + static_cast<double>(room.reach) + 1.0 < static_cast<double>(lines - 1);
  return room;
}

}  // namespace

bool has_room(double frequency_hz, double rate_hz, std::size_t block_frames, const DeflectionOptions& options) {
  const double place = frequency_hz / rate_hz * static_cast<double>(block_frames);
  return room_for(place, block_frames / 2 + 1, options.window, options.wander).is_there;
}

PeakLines peak_lines(double frequency_hz, double line_hz, std::size_t lines, Window window, double wander) {
  constexpr std::size_t side = 6;  // lines of noise on each side
  PeakLines peak{.asked_hz = frequency_hz};
  const double place = frequency_hz / line_hz;
  const auto [lobe, reach, is_there] = room_for(place, lines, window, wander);
  if (!is_there) {
    throw base::usage_error(
        {}, fmt::format("a deflection at {:.6g} Hz", frequency_hz),
        fmt::format("with lines {:.4g} Hz apart it lies between {:.4g} and {:.6g} Hz", line_hz,
                    static_cast<double>(lobe + reach) * line_hz, static_cast<double>(lines - 1) * line_hz));
  }
  const auto middle = static_cast<std::size_t>(std::lround(place));
  peak.first = std::max(middle - reach, lobe);
  peak.count = middle + reach + 1 - peak.first;
  const std::size_t away = lobe + 1;  // further off, a steady tone is below 1e-4 of its power
  const std::size_t below_end = peak.first > away + lobe ? peak.first - away : lobe;
  peak.below_count = std::min(side, below_end - lobe);
  peak.below_first = below_end - peak.below_count;
  peak.above_first = std::min(peak.first + peak.count + away, lines - 1);
  peak.above_count = std::min(side, lines - 1 - peak.above_first);
  return peak;
}

struct DeflectionConsumer::Setup {
  double rate_hz = 0.0;
  std::vector<recording::Channel> channels;  ///< that take part
  std::vector<std::size_t> which;            ///< their numbers in the recording
  std::vector<PeakLines> peaks;
  DeflectionOptions options;
  std::optional<std::size_t> reference;  ///< among `channels`
};

struct DeflectionConsumer::Sums {
  std::vector<PeakSums> peaks;
  std::vector<std::size_t> counts;
  std::vector<std::vector<BlockRun>> used;                ///< by each channel
  std::vector<std::vector<std::complex<double>>> values;  ///< of the block at hand: per wanted line, of all channels
  std::vector<char> valid;
};

DeflectionConsumer::DeflectionConsumer(const recording::Recording& recording, recording::FrameRange range,
                                       const std::vector<double>& frequencies_hz, const DeflectionOptions& options)
    : BlockConsumer(plan_for(recording, range, frequencies_hz, options)),
      transform_(samples(options.window, plan().length())),
      sums_(std::make_unique<Sums>()) {
  auto setup = std::make_shared<Setup>();
  setup->rate_hz = recording.rate_hz;
  setup->options = options;
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    if (!takes_part(recording.channels[c])) continue;
    if (options.reference == c) setup->reference = setup->channels.size();
    setup->channels.push_back(recording.channels[c]);
    setup->which.push_back(c);
  }
  if (options.reference && !setup->reference) {
    throw base::usage_error(recording.file.string(),
                            fmt::format("channel {} is no reference for a deflection", *options.reference + 1),
                            "name a channel of acceleration, velocity or displacement");
  }
  if (setup->channels.size() < 2) {
    throw base::usage_error(recording.file.string(), "a deflection of fewer than two channels of motion",
                            "record two points at once, one of them as the reference");
  }
  const double line = recording.rate_hz / static_cast<double>(plan().length());
  for (const double f : frequencies_hz) {
    setup->peaks.push_back(peak_lines(f, line, transform_.lines(), options.window, options.wander));
  }
  setup_ = std::move(setup);
}

DeflectionConsumer::DeflectionConsumer(const DeflectionConsumer& whole, recording::FrameRange owned)
    : BlockConsumer(whole, owned),
      setup_(whole.setup_),
      transform_(whole.transform_),
      sums_(std::make_unique<Sums>()) {}

DeflectionConsumer::~DeflectionConsumer() = default;

std::unique_ptr<recording::Consumer> DeflectionConsumer::fresh(recording::FrameRange owned) const {
  return std::unique_ptr<recording::Consumer>(new DeflectionConsumer(*this, owned));
}

void DeflectionConsumer::take_block(const Block& block) {
  const std::size_t n = setup_->channels.size();
  Sums& sums = *sums_;
  if (sums.counts.empty()) {
    sums.counts.assign(n * n, 0);
    sums.used.resize(n);
    sums.valid.resize(n);
    std::size_t lines = 0;
    for (const PeakLines& peak : setup_->peaks) {
      PeakSums& of_peak = sums.peaks.emplace_back();
      for (PairSums* pair : {&of_peak.peak, &of_peak.below, &of_peak.above}) pair->start(n);
      of_peak.line_power.assign(n * (peak.count + 2), 0.0);
      lines += peak.count + 2 + peak.below_count + peak.above_count;
    }
    sums.values.assign(lines, std::vector<std::complex<double>>(n));
  }
  // Each channel is transformed once; its lines about all frequencies are kept until every channel has been.
  for (std::size_t c = 0; c < n; ++c) {
    sums.valid[c] = block.is_valid(setup_->which[c]) ? 1 : 0;
    if (sums.valid[c] == 0) continue;
    append(sums.used[c], {block.first_frame, 1, 1});
    const auto x = transform_(block.channel(setup_->which[c]));
    std::size_t at = 0;
    for (std::size_t f = 0; f < setup_->peaks.size(); ++f) {
      const PeakLines& peak = setup_->peaks[f];
      for (std::size_t l = 0; l < peak.count + 2; ++l) {
        const auto value = x[peak.first - 1 + l];
        sums.values[at++][c] = value;
        sums.peaks[f].line_power[c * (peak.count + 2) + l] += std::norm(value);
      }
      for (std::size_t l = 0; l < peak.below_count; ++l) sums.values[at++][c] = x[peak.below_first + l];
      for (std::size_t l = 0; l < peak.above_count; ++l) sums.values[at++][c] = x[peak.above_first + l];
    }
  }
  for (std::size_t i = 0; i < n; ++i) {
    for (std::size_t j = 0; j < n; ++j)
      sums.counts[i * n + j] += static_cast<std::size_t>(sums.valid[i] & sums.valid[j]);
  }
  std::size_t at = 0;
  for (std::size_t f = 0; f < setup_->peaks.size(); ++f) {
    const PeakLines& peak = setup_->peaks[f];
    PeakSums& of_peak = sums.peaks[f];
    for (std::size_t l = 0; l < peak.count; ++l) of_peak.peak.add(sums.values[at + 1 + l], sums.valid);
    at += peak.count + 2;
    for (std::size_t l = 0; l < peak.below_count; ++l) of_peak.below.add(sums.values[at++], sums.valid);
    for (std::size_t l = 0; l < peak.above_count; ++l) of_peak.above.add(sums.values[at++], sums.valid);
  }
}

void DeflectionConsumer::merge(recording::Consumer& next) {
  Sums& theirs = *dynamic_cast<DeflectionConsumer&>(next).sums_;
  Sums& mine = *sums_;
  if (theirs.counts.empty()) return;
  if (mine.counts.empty()) {
    mine = std::move(theirs);
    return;
  }
  add_to(mine.counts, theirs.counts);
  for (std::size_t f = 0; f < mine.peaks.size(); ++f) {
    mine.peaks[f].peak.merge(theirs.peaks[f].peak);
    mine.peaks[f].below.merge(theirs.peaks[f].below);
    mine.peaks[f].above.merge(theirs.peaks[f].above);
    add_to(mine.peaks[f].line_power, theirs.peaks[f].line_power);
  }
  for (std::size_t c = 0; c < mine.used.size(); ++c) {
    for (const BlockRun& run : theirs.used[c]) append(mine.used[c], run);
  }
}

std::vector<base::Answer<DeflectionShape>> DeflectionConsumer::shapes() const {
  std::vector<base::Answer<DeflectionShape>> all;
  std::vector<Averages> of_channels;
  for (const auto& used : sums_->used) of_channels.push_back(averages(setup_->options.window, plan().length(), used));
  for (std::size_t f = 0; f < setup_->peaks.size(); ++f) {
    if (sums_->counts.empty()) {
      all.emplace_back(base::Refusal{"no-valid-block", "no block of the recording is free of missing samples",
                                     "record again, or ask for coarser lines"});
      continue;
    }
    all.push_back(deflection_shape({.lines = setup_->peaks[f],
                                    .sums = sums_->peaks[f],
                                    .counts = sums_->counts,
                                    .channels = setup_->channels,
                                    .averages = of_channels,
                                    .line_hz = setup_->rate_hz / static_cast<double>(plan().length()),
                                    .least_coherence = setup_->options.least_coherence,
                                    .window = setup_->options.window,
                                    .reference = setup_->reference}));
  }
  return all;
}

std::vector<base::Answer<DeflectionShape>> deflections(const recording::Reader& reader, recording::FrameRange range,
                                                       std::span<const double> frequencies_hz,
                                                       const DeflectionOptions& options, const base::Context& context) {
  DeflectionConsumer consumer(reader.recording(), range, {frequencies_hz.begin(), frequencies_hz.end()}, options);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, range, consumers, context, "deflections");
  return consumer.shapes();
}

}  // namespace stillmass::spectral
