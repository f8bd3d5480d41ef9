#include "step/peaks.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "stillmass/spectral/quantity.hpp"

#include "step/fine_tones.hpp"
#include "step/levels.hpp"

namespace stillmass::step {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;

constexpr std::size_t most_tones = 60;  // of a channel: for causes and families

// An amplitude as measured in the quantity that the channel is shown in.
Estimate in_quantity_of(const ChannelSpectrum& channel, Estimate measured, double frequency_hz) {
  const auto n = spectral::integrations_between(channel.measured.quantity, channel.shown.quantity);
  const double factor = std::abs(spectral::integration_factor(n.value_or(0), frequency_hz));
  measured.value *= factor;
  if (measured.u) *measured.u *= factor;
  measured.quantity = channel.shown.quantity;
  return with_calibration(measured, channel.channel);
}

// As another quantity of motion at its own frequency.
spectral::Tone as_velocity(spectral::Tone tone) {
  const auto n = spectral::integrations_between(tone.amplitude_rms.quantity, Quantity::velocity);
  const double factor = std::abs(spectral::integration_factor(n.value_or(0), tone.frequency.value));
  tone.amplitude_rms.value *= factor;
  if (tone.amplitude_rms.u) *tone.amplitude_rms.u *= factor;
  tone.amplitude_rms.quantity = Quantity::velocity;
  tone.floor_density *= factor * factor;
  return tone;
}

// The blocks scatter like noise and the peak is broader than a tone of the wandering speed: a resonance that noise
// excites. How broad: as `machine::running_speed` takes it.
bool is_random(const spectral::Tone& tone, const SpectrumResult& result) {
  constexpr double like_noise = 0.6;
  constexpr double broad = 1.5;
  constexpr double lobe = 0.6;  // lines: a Hann window's lobe as a Gaussian
  const double wander = result.refined_speed ? result.refined_speed->wander : 0.0;
  const double of_speed = std::hypot(1.0, wander * tone.frequency.value / (lobe * result.choice.line_hz));
  return tone.spread && *tone.spread > like_noise && tone.breadth > broad * of_speed;
}

}  // namespace

std::size_t position_of(const SpectrumResult& result, const ChannelSpectrum& channel) {
  std::size_t position = 0;
  while (result.recording.channels[position].index != channel.channel.index) ++position;
  return position;
}

void find_peaks(SpectrumResult& result, const recording::Reader& reader, const SpectrumRequest& request,
                const base::Context& context) {
  std::vector<ChannelTones> tones;
  std::vector<const spectral::Spectrum*> spectra;
  for (const ChannelSpectrum& each : result.channels) {
    spectral::ToneOptions options;
    options.strongest = std::max(most_tones, request.peaks);
    if (request.max_frequency_hz) options.band_hz = Interval{0.0, *request.max_frequency_hz};
    tones.push_back({position_of(result, each), spectral::tones(each.shown, options)});
    spectra.push_back(&each.shown);
  }
  const auto fine = fine_tones(reader, result.range, tones, spectra, context);
  for (std::size_t i = 0; i < result.channels.size(); ++i) {
    ChannelSpectrum& each = result.channels[i];
    for (const FineTone& found : fine[i]) {
      SpectralPeak peak;
      peak.tone = found.tone;
      peak.tone.amplitude_rms = with_calibration(peak.tone.amplitude_rms, each.channel);
      peak.closeness = found.closeness;
      peak.note = found.note;
      peak.wander_hz = found.wander_hz;
      peak.variation = found.variation;
      peak.resolution_hz = found.resolution_hz;
      each.peaks.push_back(peak);
      if (!base::is_motion(each.shown.quantity)) continue;
      peak.tone = as_velocity(peak.tone);
      each.velocity_peaks.push_back(std::move(peak));
    }
  }
}

void add_peak(ChannelSpectrum& channel, const spectral::CloseTone& tone, const std::string& note) {
  const double frequency = tone.frequency.value;
  SpectralPeak peak;
  peak.tone.frequency = tone.frequency;
  peak.tone.amplitude_rms = in_quantity_of(channel, tone.amplitude_rms, frequency);
  peak.tone.line = static_cast<std::size_t>(std::lround(frequency / channel.shown.line_hz));
  peak.closeness = spectral::Closeness::resolved;
  peak.note = note;
  peak.resolution_hz = 4.0 * tone.frequency.u.value_or(0.0);
  channel.peaks.push_back(peak);
  peak.tone = as_velocity(peak.tone);
  channel.velocity_peaks.push_back(std::move(peak));
}

void find_causes(SpectrumResult& result, const SpectrumRequest& request) {
  for (std::size_t c = 0; c < result.channels.size(); ++c) {
    ChannelSpectrum& each = result.channels[c];
    std::vector<machine::Peak> peaks;
    std::vector<machine::Peak> stopped;
    for (const SpectralPeak& peak : each.peaks) {
      peaks.push_back({peak.tone.frequency, peak.tone.amplitude_rms.value, c, peak.tone.breadth});
      if (peak.in_background()) stopped.push_back(peaks.back());
    }
    auto causes = machine::causes_of_peaks(peaks, each.shown.line_hz, result.forcing, request.modes, stopped);
    for (std::size_t i = 0; i < each.peaks.size(); ++i) {
      SpectralPeak& peak = each.peaks[i];
      if (is_random(peak.tone, result)) {  // a resonance under noise is no line of a shaft
        causes[i] =
            machine::cause_of_peak(peak.tone.frequency, peak.resolution_hz, {}, request.modes, peak.in_background());
      }
      if (peak.resolution_hz < each.shown.line_hz) {  // parted by a finer look
        causes[i] = machine::cause_of_peak(peak.tone.frequency, peak.resolution_hz, result.forcing, request.modes,
                                           peak.in_background());
      }
      // An amplitude that comes and goes is a resonance under noise more often than a side band.
      constexpr double comes_and_goes = 0.2;
      const auto& force = causes[i].forcing;
      if (peak.variation.value_or(0.0) > comes_and_goes && force && result.forcing[*force].rank > 0) {
        causes[i] = machine::cause_of_peak(peak.tone.frequency, peak.resolution_hz, {}, request.modes);
      }
      peak.cause = std::move(causes[i]);
      if (i < each.velocity_peaks.size()) each.velocity_peaks[i].cause = peak.cause;
    }
  }
}

}  // namespace stillmass::step
