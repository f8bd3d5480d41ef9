#include "step/levels.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/number.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/spectral_quality.hpp"

namespace stillmass::step {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;
using base::Refusal;

constexpr Interval severity_band{10.0, 1000.0};
constexpr Interval slow_severity_band{2.0, 1000.0};
constexpr double low_end_missing = 1.1;  // of the band's lower end: further up the level is no longer that of the band
constexpr std::int64_t cut_samples = 3;  // at full scale: the channel is unusable (as `check` has it)
constexpr std::string_view typical_standard = "ISO 20816-1";

// Peak-to-peak of a broad-band displacement from its r.m.s. value, as of a sine; u reaches to what its lines give when
// they all stand at their greatest at once.
std::optional<Estimate> peak_to_peak(const ChannelSpectrum& channel, const std::optional<Estimate>& rms) {
  if (!rms) return {};
  constexpr double of_sine = 2.0 * std::numbers::sqrt2;
  double sum = 0.0;
  for (const SpectralPeak& peak : channel.velocity_peaks) {
    sum += peak.tone.amplitude_rms.value / (2.0 * std::numbers::pi * peak.tone.frequency.value);
  }
  Estimate out = *rms;
  out.value *= of_sine;
  const double beyond = std::max(0.0, of_sine * sum - out.value);
  if (out.u) out.u = std::hypot(*out.u * of_sine, 0.5 * beyond);
  return out;
}

// A level as it is held against limits: a sensor without a calibration of its own counts as known to 2 % (common
// practice).
Estimate for_verdict(Estimate level, const recording::Channel& channel) {
  level.u = std::hypot(level.u.value_or(0.0), channel.factor_u.value_or(0.02) * level.value);
  return level;
}

// The support class of a direction: as declared, else from the lowest natural frequency measured in it.
base::Answer<std::optional<machine::Support>> support_of(const SpectrumRequest& request, const SitePoint& point,
                                                         const std::optional<Estimate>& forcing_1x) {
  if (const auto declared = request.site.machine->support(point.direction)) return std::optional(*declared);
  const modal::Mode* lowest = nullptr;
  for (const modal::Mode& mode : request.modes) {
    const SitePoint* at = request.site.point(mode.point);
    if (at == nullptr || at->direction != point.direction) continue;
    if (lowest == nullptr || mode.frequency.value < lowest->frequency.value) lowest = &mode;
  }
  if (lowest == nullptr || !forcing_1x) return std::optional<machine::Support>{};
  const auto measured = machine::support_class(lowest->frequency, *forcing_1x);
  if (!measured) return measured.refusal();
  return std::optional(*measured);
}

bool is_usable(const ChannelSpectrum& channel, const SpectrumRequest& request) {
  const bool judged_unusable =
      std::find(request.unusable.begin(), request.unusable.end(), channel.channel.name) != request.unusable.end();
  return !judged_unusable && channel.features.at_full_scale.value_or(0) < cut_samples;
}

base::Answer<Severity> severity_of(const ChannelSpectrum& channel, const SpectrumRequest& request,
                                   const spectral::Spectrum& velocity, const std::optional<Estimate>& forcing_1x) {
  if (!request.runs_steadily) {
    return Refusal{"limit-unknown", "the recording is not of the machine running steadily",
                   "record the running machine for a minute at its usual load"};
  }
  if (!request.site.machine) {
    return Refusal{"limit-unknown", "nothing is said of the machine", "give --survey with [machine] and [limit]"};
  }
  const SitePoint* point = request.site.point(channel.channel.point);
  if (point == nullptr) {
    return Refusal{"limit-unknown", "nothing is said of the measuring point",
                   "name the channel's point in the survey file"};
  }
  machine::SeverityQuestion question;
  question.standard = request.site.standard;
  question.category = request.site.category;
  question.direction = point->direction;
  question.on_bearing_housing = point->on_bearing_housing;
  const auto support = support_of(request, *point, forcing_1x);
  if (!support) return support.refusal();
  question.support = *support;
  const auto limits = machine::severity_limits(*request.site.machine, question);
  if (!limits) return limits.refusal();

  machine::SeverityLevels levels;
  const auto held_band = held(velocity, limits->band_hz);
  if (!held_band) return Refusal{"limit-unknown", "the spectrum does not reach the standard's band", "record faster"};
  levels.held_hz = *held_band;
  levels.velocity = for_verdict(*level(velocity, limits->band_hz), channel.channel);
  const spectral::Spectrum moved = in_quantity(channel.measured, Quantity::displacement);
  if (auto displacement = level(moved, limits->band_hz)) {
    levels.displacement = for_verdict(*displacement, channel.channel);
    levels.displacement_pp = peak_to_peak(channel, levels.displacement);
  }
  levels.unit_known = channel.channel.unit_known;
  levels.usable = is_usable(channel, request);
  const auto verdict = machine::judge(*limits, levels);
  if (!verdict) return verdict.refusal();
  return Severity{*limits, *verdict, levels.velocity.value};
}

}  // namespace

Interval standard_band(const Site& site) {
  const bool slow = site.machine && site.machine->speed_hz && site.machine->speed_hz->lo <= 10.0;
  return slow ? slow_severity_band : severity_band;
}

spectral::Spectrum in_quantity(const spectral::Spectrum& measured, Quantity wanted) {
  if (!base::is_motion(measured.quantity) || measured.quantity == wanted) return measured;
  return spectral::as_quantity(measured, wanted, spectral::slope_end_hz(measured).value_or(0.0));
}

Estimate with_calibration(Estimate level, const recording::Channel& channel) {
  if (level.u && channel.factor_u) level.u = std::hypot(*level.u, *channel.factor_u * level.value);
  return level;
}

std::optional<Interval> held(const spectral::Spectrum& spectrum, Interval band_hz) {
  if (spectrum.density.empty()) return {};
  const Interval given{spectrum.frequency(spectrum.first_line), spectrum.rate_hz / 2.0};
  const Interval both{std::max(band_hz.lo, given.lo), std::min(band_hz.hi, given.hi)};
  if (both.lo >= both.hi) return {};  // nor where they only touch
  return both;
}

std::optional<Estimate> level(const spectral::Spectrum& spectrum, Interval band_hz) {
  const auto part = held(spectrum, band_hz);
  if (!part) return {};
  return spectral::band_rms(spectrum, *part);
}

void judge_channel(ChannelSpectrum& channel, const SpectrumRequest& request,
                   const std::optional<Estimate>& forcing_1x) {
  if (!base::is_motion(channel.measured.quantity) || channel.measured.density.empty()) {
    channel.severity = Refusal{"limit-unknown", "the channel is not a vibration", ""};
    return;
  }
  if (channel.measured.averaging == spectral::Averaging::peak_hold) {
    channel.severity = Refusal{"limit-unknown", "a peak hold has no r.m.s. level", "average the mean of the squares"};
    return;
  }
  const spectral::Spectrum velocity = in_quantity(channel.measured, Quantity::velocity);
  const Interval band = standard_band(request.site);
  if (auto value = level(velocity, band)) channel.severity_velocity = with_calibration(*value, channel.channel);
  channel.severity = severity_of(channel, request, velocity, forcing_1x);
  const SitePoint* point = request.site.point(channel.channel.point);
  if (!channel.severity_velocity || !channel.channel.unit_known || point == nullptr) return;
  if (!request.runs_steadily || !is_usable(channel, request)) return;
  const bool wanted = request.site.standard == typical_standard || request.site.standard.empty();
  if (!channel.severity && point->on_bearing_housing && wanted) {
    channel.typical = machine::against_ranges(machine::typical_ranges(), *channel.severity_velocity);
  }
  if (held(velocity, band)->lo > low_end_missing * band.lo) return;
  channel.plant = machine::against_plant(request.site.plant, *channel.severity_velocity);
}

}  // namespace stillmass::step
