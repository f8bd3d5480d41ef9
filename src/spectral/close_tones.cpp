#include "stillmass/spectral/close_tones.hpp"

#include <algorithm>
#include <cmath>
#include <memory>
#include <numbers>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/close_judgement.hpp"
#include "spectral/close_stretch.hpp"

namespace stillmass::spectral {

namespace {

using recording::FrameRange;
using recording::Recording;

constexpr std::size_t least_samples = 16;

ToneCluster cluster_of(const Recording& recording, const CloseBand& wanted, const CloseStretch& stretch) {
  ToneCluster cluster;
  cluster.channel = wanted.channel;
  cluster.channel_name = recording.channels[wanted.channel].name;
  cluster.band_hz = wanted.band_hz;
  const BaseBand& band = stretch.band();
  std::span<const std::complex<double>> samples = stretch.samples();
  if (samples.size() < least_samples) return cluster;
  const CloseScale scale{band.centre_hz, 0.5 * wanted.band_hz.width(), band.low_rate_hz(),
                         stretch.turns_at(0.5 * static_cast<double>(samples.size() - 1)),
                         recording.channels[wanted.channel].unit.quantity};
  CloseJudgement judgement = judged(samples, scale);
  cluster.closeness = judgement.closeness;
  cluster.tones = std::move(judgement.tones);
  cluster.stretch_s = static_cast<double>(samples.size()) / scale.rate_hz;
  const double frame = stretch.frame_at(0.5 * static_cast<double>(samples.size() - 1));
  const double whole = std::floor(frame);
  cluster.middle_s = recording.time_s(static_cast<std::int64_t>(whole)) + (frame - whole) / recording.rate_hz;
  cluster.least_spacing_hz = 1.0 / cluster.stretch_s;
  cluster.record_s = judgement.record_s;
  cluster.wander_hz = judgement.wander_hz;
  cluster.variation = judgement.variation;
  cluster.noise_density = judgement.noise_density;
  cluster.evidence = judgement.evidence;
  return cluster;
}

void check(const Recording& recording, const CloseBand& band) {
  if (band.channel >= recording.channels.size()) {
    throw base::usage_error(recording.file.string(), fmt::format("there is no channel {}", band.channel + 1),
                            fmt::format("it has {}", recording.channels.size()));
  }
  const double half = 0.5 * recording.rate_hz;
  if (!(band.band_hz.lo >= 0.0 && band.band_hz.lo < band.band_hz.hi && band.band_hz.hi <= half)) {
    throw base::usage_error(recording.file.string(),
                            fmt::format("a band from {} to {} Hz", band.band_hz.lo, band.band_hz.hi),
                            fmt::format("a band lies between 0 and {:.6g} Hz", half));
  }
}

}  // namespace

std::string_view name(Closeness closeness) {
  switch (closeness) {
    case Closeness::single:
      return "single";
    case Closeness::resolved:
      return "resolved";
    case Closeness::unresolved:
      return "unresolved";
    case Closeness::unsteady:
      return "unsteady";
    case Closeness::none:
      return "none";
  }
  return "none";
}

bool suspect(const Tone& tone) {
  constexpr double random = 0.9;     // a beat's scatter is at most 0.82: three equal tones
  constexpr double more_than = 1.6;  // of the scatter of a steady tone in this floor: few blocks tell it to a third
  constexpr double at_least = 0.03;
  constexpr double broad = 1.25;
  constexpr double clear = 30.0;  // a peak less prominent has a breadth of noise
  if (!(tone.prominence > 1.0)) return false;
  if (tone.spread && *tone.spread > random) return false;
  const double steady = std::sqrt(2.0 * tone.prominence - 1.0) / tone.prominence;
  if (tone.spread && *tone.spread > std::max(more_than * steady, at_least)) return true;
  return tone.breadth > broad && tone.prominence > clear;
}

base::Interval band_around(const Tone& tone, const Spectrum& spectrum) {
  const double reach = (lobe_bins(spectrum.window) + 1.0) * spectrum.line_hz;
  const base::Interval all{0.0, 0.5 * spectrum.rate_hz};
  return {all.clamped(tone.frequency.value - reach), all.clamped(tone.frequency.value + reach)};
}

std::vector<ToneCluster> resolve_tones(const recording::Reader& reader, FrameRange range,
                                       std::span<const CloseBand> bands, const base::Context& context) {
  const Recording& recording = reader.recording();
  std::vector<std::unique_ptr<CloseStretch>> stretches;
  std::vector<recording::Consumer*> consumers;
  for (const CloseBand& band : bands) {
    check(recording, band);
    stretches.push_back(std::make_unique<CloseStretch>(recording, range, band.channel, band.band_hz));
    consumers.push_back(stretches.back().get());
  }
  recording::run_pass(reader, range, consumers, context, "close tones");
  std::vector<ToneCluster> clusters;
  for (std::size_t i = 0; i < bands.size(); ++i) {
    context.check_stop();
    clusters.push_back(cluster_of(recording, bands[i], *stretches[i]));
  }
  return clusters;
}

ToneCluster resolve_tones(std::span<const double> samples, double rate_hz, base::Quantity quantity,
                          base::Interval band_hz) {
  const auto frames = static_cast<std::int64_t>(samples.size());
  Recording recording;
  recording.rate_hz = rate_hz;
  recording.frames = frames;
  recording.channels.resize(1);
  recording.channels.front().unit = base::si_unit(quantity);
  recording.segments.push_back({0, frames, 0.0});
  const CloseBand band{0, band_hz};
  check(recording, band);
  recording::Chunk chunk;
  chunk.resize(1, samples.size());
  std::copy(samples.begin(), samples.end(), chunk.channel(0).begin());
  CloseStretch whole(recording, {0, frames}, 0, band_hz);
  const auto partial = whole.fresh({0, frames});
  partial->take(chunk);
  whole.merge(*partial);
  return cluster_of(recording, band, whole);
}

ToneCluster as_quantity(const ToneCluster& cluster, base::Quantity from, base::Quantity to) {
  const auto integrations = integrations_between(from, to);
  if (!integrations) {
    throw base::usage_error({}, fmt::format("a tone of {} cannot become one of {}", base::name(from), base::name(to)));
  }
  ToneCluster result = cluster;
  for (CloseTone& tone : result.tones) {
    const double f = tone.frequency.value;
    if (!(f > 0.0)) continue;
    const auto factor = integration_factor(*integrations, f);
    const double relative = *integrations * tone.frequency.u.value_or(0.0) / f * tone.amplitude_rms.value;
    if (tone.amplitude_rms.u) tone.amplitude_rms.u = std::abs(factor) * std::hypot(*tone.amplitude_rms.u, relative);
    tone.amplitude_rms.value *= std::abs(factor);
    tone.amplitude_rms.quantity = to;
    if (tone.phase) tone.phase->value = std::remainder(tone.phase->value + std::arg(factor), 2.0 * std::numbers::pi);
  }
  result.noise_density *= std::norm(integration_factor(*integrations, cluster.band_hz.middle()));
  return result;
}

}  // namespace stillmass::spectral
