#include "stillmass/step/spectrum.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "stillmass/base/number.hpp"
#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/spectral_quality.hpp"

namespace stillmass::step {
namespace {

using base::Interval;
using base::Quantity;

constexpr Interval severity_band{10.0, 1000.0};      // ISO 10816-1 and its parts
constexpr Interval slow_severity_band{2.0, 1000.0};  // for speeds up to 600 r/min (from memory)

Interval standard_band(const Site& site) {
  const bool slow = site.machine && site.machine->speed_hz && site.machine->speed_hz->lo <= 10.0;
  return slow ? slow_severity_band : severity_band;
}

spectral::Spectrum in_quantity(const spectral::Spectrum& measured, Quantity wanted) {
  if (!base::is_motion(measured.quantity) || measured.quantity == wanted) return measured;
  const double low = spectral::slope_end_hz(measured).value_or(0.0);
  return spectral::as_quantity(measured, wanted, low);
}

// A level with the uncertainty of the sensor's calibration in its own, where one was made.
std::optional<base::Estimate> with_calibration(std::optional<base::Estimate> level, const recording::Channel& channel) {
  if (level && level->u && channel.factor_u) level->u = std::hypot(*level->u, *channel.factor_u * level->value);
  return level;
}

// The part of a band that the spectrum holds; nothing where they do not meet.
std::optional<Interval> held(const spectral::Spectrum& spectrum, Interval band) {
  if (spectrum.density.empty()) return {};
  const Interval given{spectrum.frequency(spectrum.first_line), spectrum.rate_hz / 2.0};
  if (!band.intersects(given) || given.lo >= given.hi) return {};
  return Interval{std::max(band.lo, given.lo), std::min(band.hi, given.hi)};
}

// The level in that part.
std::optional<base::Estimate> level(const spectral::Spectrum& spectrum, Interval band) {
  const auto part = held(spectrum, band);
  if (!part) return {};
  return spectral::band_rms(spectrum, *part);
}

base::Answer<Severity> severity_of(const ChannelSpectrum& channel, const SpectrumRequest& request,
                                   const spectral::Spectrum& velocity) {
  if (!request.site.machine) {
    return base::Refusal{"limit-unknown", "nothing is said of the machine", "give --survey with [machine] and [limit]"};
  }
  const SitePoint* point = request.site.point(channel.channel.point);
  if (point == nullptr) {
    return base::Refusal{"limit-unknown", "nothing is said of the measuring point",
                         "name the channel's point in the survey file"};
  }
  machine::SeverityQuestion question;
  question.standard = request.site.standard;
  question.category = request.site.category;
  question.direction = point->direction;
  question.on_bearing_housing = point->on_bearing_housing;
  const auto limits = machine::severity_limits(*request.site.machine, question);
  if (!limits) return limits.refusal();
  const double top = velocity.rate_hz / 2.0;
  if (velocity.frequency(velocity.first_line) > limits->band_hz.lo * 1.1 || top < limits->band_hz.hi * 0.4) {
    return base::Refusal{"limit-unknown",
                         "the spectrum covers only " + base::rounded(velocity.frequency(velocity.first_line)) + " to " +
                             base::rounded(top) + " Hz",
                         "record at 2560 Hz or more, for long enough, with a sensor that reaches " +
                             base::rounded(limits->band_hz.lo) + " Hz"};
  }
  const auto value = level(velocity, limits->band_hz);
  const auto displacement = level(in_quantity(channel.measured, Quantity::displacement), limits->band_hz);
  std::optional<double> moved;
  if (displacement) moved = displacement->value;
  return Severity{*limits, machine::zone(*limits, value->value, moved), value->value};
}

std::vector<machine::Peak> peaks_of(const std::vector<spectral::Tone>& tones) {
  std::vector<machine::Peak> peaks;
  for (const spectral::Tone& tone : tones) peaks.push_back({tone.frequency, tone.amplitude_rms.value});
  return peaks;
}

// The running speed: as said, or from the strongest lines of all channels.
std::optional<base::Estimate> speed_from(const SpectrumRequest& request,
                                         const std::vector<std::vector<spectral::Tone>>& tones) {
  if (!request.site.machine) {
    if (!request.speed_hz) return {};
    return base::Estimate{*request.speed_hz, {}, {}, Quantity::speed};
  }
  machine::Machine machine = *request.site.machine;
  if (request.speed_hz) machine.speed_hz = Interval{*request.speed_hz, *request.speed_hz};
  std::optional<base::Estimate> best;
  double strongest = 0.0;
  for (const auto& of_channel : tones) {
    const std::vector<machine::Peak> peaks = peaks_of(of_channel);
    const auto speed = machine::running_speed(peaks, machine);
    if (!speed) continue;
    const auto line = std::find_if(peaks.begin(), peaks.end(),
                                   [&](const machine::Peak& peak) { return peak.frequency.value == speed->value; });
    const double amplitude = line == peaks.end() ? 0.0 : line->amplitude;
    if (best && amplitude <= strongest) continue;
    best = *speed;
    strongest = amplitude;
  }
  if (!best && request.speed_hz) best = base::Estimate{*request.speed_hz, {}, {}, Quantity::speed};
  return best;
}

}  // namespace

SpectrumResult spectrum(const recording::Reader& reader, const SpectrumRequest& request, const base::Context& context) {
  SpectrumResult result;
  result.recording = reader.recording();
  result.range = frames_of(result.recording, request.part);
  result.detector = request.detector;
  result.options = request.options;
  result.max_frequency_hz = request.max_frequency_hz;
  result.findings = result.recording.findings;

  const std::vector<spectral::Spectrum> spectra =
      spectral::averaged_spectra(reader, result.range, request.options, context);
  std::vector<std::vector<spectral::Tone>> tones;
  for (std::size_t c = 0; c < spectra.size(); ++c) {
    const recording::Channel& channel = result.recording.channels[c];
    if (channel.role == recording::Role::tacho) continue;
    ChannelSpectrum each;
    each.channel = channel;
    each.measured = spectra[c];
    each.shown = in_quantity(spectra[c], request.quantity.value_or(Quantity::velocity));
    each.band_hz = request.band_hz.value_or(standard_band(request.site));
    each.overall = with_calibration(level(each.shown, each.band_hz), channel);
    each.band_hz = held(each.shown, each.band_hz).value_or(each.band_hz);  // what was summed, and no more, is stated
    if (spectra[c].density.empty()) {
      each.findings.push_back({base::Code::missing_values, "no block of valid samples in the part used", channel.name});
    } else if (channel.role == recording::Role::vibration) {
      each.findings = spectral::spectral_findings(
          spectra[c], channel, request.site.machine ? request.site.machine->line_frequency_hz : std::nullopt);
    }
    spectral::ToneOptions options;
    options.strongest = request.peaks;
    if (request.max_frequency_hz) options.band_hz = Interval{0.0, *request.max_frequency_hz};
    tones.push_back(spectral::tones(each.shown, options));
    result.channels.push_back(std::move(each));
  }

  result.speed = speed_from(request, tones);
  if (result.speed && request.site.machine) {
    result.forcing = machine::forcing_frequencies(*request.site.machine, *result.speed);
  }
  for (std::size_t i = 0; i < result.channels.size(); ++i) {
    ChannelSpectrum& each = result.channels[i];
    for (spectral::Tone tone : tones[i]) {
      tone.amplitude_rms = *with_calibration(tone.amplitude_rms, each.channel);
      machine::Cause cause = machine::cause_of_peak(tone.frequency, each.shown.line_hz, result.forcing, request.modes);
      each.peaks.push_back({tone, std::move(cause)});
    }
    if (!base::is_motion(each.measured.quantity) || each.measured.density.empty()) {
      each.severity = base::Refusal{"limit-unknown", "the channel is not a vibration", ""};
      continue;
    }
    const spectral::Spectrum velocity = in_quantity(each.measured, Quantity::velocity);
    each.severity_velocity = with_calibration(level(velocity, standard_band(request.site)), each.channel);
    each.severity = severity_of(each, request, velocity);
  }
  return result;
}

}  // namespace stillmass::step
