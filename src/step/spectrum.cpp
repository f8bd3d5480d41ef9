#include "stillmass/step/spectrum.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/spectral_quality.hpp"
#include "stillmass/step/diagnosis.hpp"

#include "step/extras.hpp"
#include "step/fine_tones.hpp"
#include "step/levels.hpp"

namespace stillmass::step {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;

constexpr std::size_t most_tones = 60;      // of a channel: for causes and families
constexpr double much_wander = 0.005;       // of the speed: lines are smeared (common practice)
constexpr double coarse = 0.25;             // of the speed: lines so far apart do not show it
constexpr double shocks_kurtosis = 20.0;    // single blows, not a running machine (common practice)
constexpr std::int64_t full_scale_run = 3;  // samples at full scale that make a finding (as `check` has it)

// What is known of the machine, with the speed of this recording.
std::optional<machine::Machine> machine_of(const SpectrumRequest& request) {
  if (!request.runs_steadily || (!request.site.machine && !request.speed_hz)) return {};
  machine::Machine machine = request.site.machine.value_or(machine::Machine{});
  if (request.speed_hz) machine.speed_hz = Interval{*request.speed_hz, *request.speed_hz};
  return machine;
}

// What helps to choose the blocks: the speed, and how close its forcing frequencies lie.
spectral::SpectrumOptions informed(spectral::SpectrumOptions options, const std::optional<machine::Machine>& machine) {
  if (!machine || !machine->speed_hz) return options;
  const double speed = machine->speed_hz->middle();
  if (!options.speed_hz) options.speed_hz = speed;
  if (const auto pair = machine::smallest_distance(*machine, speed); pair && !options.separate_hz) {
    options.separate_hz = pair->distance_hz;
  }
  return options;
}

void measure(SpectrumResult& result, const recording::Reader& reader, const SpectrumRequest& request,
             const base::Context& context) {
  spectral::SpectrumConsumer spectra(result.recording, result.range, result.options);
  recording::TimeFeatures features(result.recording);
  const std::array<recording::Consumer*, 2> consumers{&spectra, &features};
  recording::run_pass(reader, result.range, consumers, context, "spectra");
  const auto all_spectra = spectra.spectra();
  const auto all_features = features.result();
  for (std::size_t c = 0; c < all_spectra.size(); ++c) {
    const recording::Channel& channel = result.recording.channels[c];
    if (channel.role == recording::Role::tacho) continue;
    ChannelSpectrum& each = result.channels.emplace_back();
    each.channel = channel;
    each.features = all_features[c];
    each.measured = all_spectra[c];
    each.shown = in_quantity(all_spectra[c], request.quantity.value_or(Quantity::velocity));
    if (each.shown.integrations > 0) each.low_limit_hz = each.shown.frequency(each.shown.first_line);
    each.band_hz = request.band_hz.value_or(standard_band(request.site));
    if (auto overall = level(each.shown, each.band_hz)) each.overall = with_calibration(*overall, channel);
    if (request.band_hz && !each.shown.density.empty() && !held(each.shown, *request.band_hz)) {
      throw base::usage_error(result.recording.file.string(),
                              fmt::format("a band from {:.4g} to {:.4g} Hz", each.band_hz.lo, each.band_hz.hi),
                              fmt::format("the spectrum of '{}' reaches from {:.4g} to {:.4g} Hz", channel.name,
                                          each.shown.frequency(each.shown.first_line), 0.5 * each.shown.rate_hz));
    }
    each.band_hz = held(each.shown, each.band_hz).value_or(each.band_hz);  // what was summed, and no more, is stated
    if (each.measured.density.empty()) {
      each.findings.push_back({base::Code::missing_values, "no block of valid samples in the part used", channel.name});
    } else {
      each.third_octaves =
          spectral::third_octaves(each.shown, {0.0, request.max_frequency_hz.value_or(0.5 * result.recording.rate_hz)});
      if (channel.role == recording::Role::vibration) {
        each.findings = spectral::spectral_findings(
            each.measured, channel, request.site.machine ? request.site.machine->line_frequency_hz : std::nullopt);
      }
    }
    if (each.features.kurtosis.value_or(0.0) > shocks_kurtosis && channel.role == recording::Role::vibration) {
      each.findings.push_back(
          {base::Code::single_shocks,
           fmt::format("kurtosis {:.3g}: single shocks make the signal, averaged levels mean little",
                       *each.features.kurtosis),
           channel.name});
    }
    if (each.features.deviation == 0.0) {
      each.findings.push_back({base::Code::no_signal, "nothing varies: there is no signal", channel.name});
    }
    if (each.features.at_full_scale.value_or(0) >= full_scale_run) {
      each.findings.push_back(
          {base::Code::clipped,
           fmt::format("{} samples stand at the recorder's full scale: levels are too low, lines may be false",
                       *each.features.at_full_scale),
           channel.name});
    }
  }
}

// Where the channel stands in the recording.
std::size_t position_of(const SpectrumResult& result, const ChannelSpectrum& channel) {
  std::size_t position = 0;
  while (result.recording.channels[position].index != channel.channel.index) ++position;
  return position;
}

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

// The peaks of every channel, with a finer look at those that may be several. Gives the resolution of each.
void find_peaks(SpectrumResult& result, const recording::Reader& reader, const SpectrumRequest& request,
                std::vector<std::vector<double>>& resolutions, const base::Context& context) {
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
    resolutions.emplace_back();
    for (const FineTone& found : fine[i]) {
      SpectralPeak peak;
      peak.tone = found.tone;
      peak.tone.amplitude_rms = with_calibration(peak.tone.amplitude_rms, each.channel);
      peak.closeness = found.closeness;
      peak.note = found.note;
      peak.wander_hz = found.wander_hz;
      peak.variation = found.variation;
      each.peaks.push_back(peak);
      resolutions.back().push_back(found.resolution_hz);
      if (!base::is_motion(each.shown.quantity)) continue;
      peak.tone = as_velocity(peak.tone);
      each.velocity_peaks.push_back(std::move(peak));
    }
  }
}

// Where the speed must be and no line stands, the whole length of the recording may still part one from a stronger
// neighbour. What it finds joins the peaks.
void look_where_the_speed_must_be(SpectrumResult& result, const recording::Reader& reader,
                                  const machine::Machine& machine, std::vector<std::vector<double>>& resolutions,
                                  const base::Context& context) {
  constexpr double most_lines = 40.0;
  const auto possible = machine::possible_speeds(machine);
  if (!possible || possible->width() > most_lines * result.choice.line_hz) return;
  const double reach = 4.0 * result.choice.line_hz;
  const Interval all{0.0, 0.5 * result.recording.rate_hz};
  const Interval band{all.clamped(possible->lo - reach), all.clamped(possible->hi + reach)};
  if (band.lo >= band.hi) return;  // the rate is too low for this speed
  std::vector<std::size_t> whose;
  std::vector<std::size_t> channels;
  for (std::size_t c = 0; c < result.channels.size(); ++c) {
    if (result.channels[c].velocity_peaks.empty()) continue;
    whose.push_back(c);
    channels.push_back(position_of(result, result.channels[c]));
  }
  const auto found = tones_within(reader, result.range, channels, band, context);
  for (std::size_t i = 0; i < whose.size(); ++i) {
    ChannelSpectrum& channel = result.channels[whose[i]];
    for (const spectral::CloseTone& close : found[i]) {
      const double frequency = close.frequency.value;
      const bool is_known = std::any_of(channel.peaks.begin(), channel.peaks.end(), [&](const SpectralPeak& peak) {
        return std::abs(peak.tone.frequency.value - frequency) < 0.25 * result.choice.line_hz;
      });
      if (is_known || !possible->contains(frequency)) continue;
      SpectralPeak peak;
      peak.tone.frequency = close.frequency;
      peak.tone.amplitude_rms = in_quantity_of(channel, close.amplitude_rms, frequency);
      peak.tone.line = static_cast<std::size_t>(std::lround(frequency / channel.shown.line_hz));
      peak.closeness = spectral::Closeness::resolved;
      peak.note = "parted from its neighbour with the whole length of the recording";
      channel.peaks.push_back(peak);
      resolutions[whose[i]].push_back(4.0 * close.frequency.u.value_or(0.0));
      peak.tone = as_velocity(peak.tone);
      channel.velocity_peaks.push_back(std::move(peak));
    }
  }
}

void find_families(SpectrumResult& result) {
  std::vector<std::vector<spectral::Tone>> all;
  for (const ChannelSpectrum& each : result.channels) {
    if (each.velocity_peaks.empty()) continue;
    all.emplace_back();
    for (const SpectralPeak& peak : each.velocity_peaks) {
      if (!peak.in_background()) all.back().push_back(peak.tone);
    }
  }
  result.tones = spectral::gathered(all, result.choice.line_hz);
  result.families = spectral::families(result.tones, result.choice.line_hz);
}

// A speed that wanders has no single value: lines show where it dwells, so a third of the wander is added to u (chosen
// here, tried on the demo). Wander beyond what a load makes is a finding.
void account_for_wander(SpectrumResult& result) {
  constexpr double dwell = 1.0 / 3.0;
  machine::RunningSpeed& found = *result.refined_speed;
  for (const ChannelSpectrum& channel : result.channels) {
    for (const SpectralPeak& peak : channel.velocity_peaks) {
      if (!peak.wander_hz) continue;
      const double order = peak.tone.frequency.value / found.speed.value;
      if (std::abs(order - std::round(order)) > 0.02 * order) continue;
      found.wander = std::max(found.wander, *peak.wander_hz / peak.tone.frequency.value);
    }
  }
  found.speed.u = std::hypot(found.speed.u.value_or(0.0), dwell * found.wander * found.speed.value);
  result.speed = found.speed;
  if (found.wander < much_wander) return;
  result.findings.push_back(
      {base::Code::speed_varies,
       fmt::format("the speed varies by {:.2g} % r.m.s. about {:.0f} r/min: the lines that follow it are "
                   "smeared, and their amplitudes read low",
                   100.0 * found.wander, 60.0 * found.speed.value)});
}

// The running speed: refined from the lines of all channels, else as said.
base::Answer<machine::RunningSpeed> speed_of(const SpectrumResult& result, const machine::Machine& machine) {
  std::vector<machine::Peak> peaks;
  for (std::size_t c = 0; c < result.channels.size(); ++c) {
    for (const SpectralPeak& peak : result.channels[c].velocity_peaks) {
      if (peak.in_background()) continue;
      peaks.push_back({peak.tone.frequency, peak.tone.amplitude_rms.value, c, peak.tone.breadth});
    }
  }
  std::vector<machine::SpeedCandidate> candidates;
  for (const spectral::HarmonicFamily& family : result.families.harmonics) {
    candidates.push_back({family.fundamental, static_cast<int>(family.members.size())});
  }
  return machine.speed_hz ? machine::running_speed(peaks, machine, result.choice.line_hz)
                          : machine::running_speed(peaks, machine, result.choice.line_hz, candidates);
}

void find_speed(SpectrumResult& result, const recording::Reader& reader, const machine::Machine& machine,
                const SpectrumRequest& request, std::vector<std::vector<double>>& resolutions,
                const base::Context& context) {
  auto found = speed_of(result, machine);
  if (!found) {
    look_where_the_speed_must_be(result, reader, machine, resolutions, context);
    found = speed_of(result, machine);
  }
  if (found && result.choice.line_hz > coarse * found->speed.value) {
    result.refusals.push_back(
        {"speed-unknown", fmt::format("lines {:.3g} Hz apart are too coarse to find the speed", result.choice.line_hz),
         "ask for a finer resolution, or use a longer part"});
  } else if (found) {
    result.refined_speed = *found;
    result.speed = found->speed;
    account_for_wander(result);
    return;
  } else {
    result.refusals.push_back(found.refusal());
  }
  if (request.speed_hz) result.speed = Estimate{*request.speed_hz, {}, {}, Quantity::speed};
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

void find_causes(SpectrumResult& result, const SpectrumRequest& request,
                 const std::vector<std::vector<double>>& resolutions) {
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
            machine::cause_of_peak(peak.tone.frequency, resolutions[c][i], {}, request.modes, peak.in_background());
      }
      if (resolutions[c][i] < each.shown.line_hz) {  // parted by a finer look
        causes[i] = machine::cause_of_peak(peak.tone.frequency, resolutions[c][i], result.forcing, request.modes,
                                           peak.in_background());
      }
      // An amplitude that comes and goes is a resonance under noise more often than a side band.
      constexpr double comes_and_goes = 0.2;
      const auto& force = causes[i].forcing;
      if (peak.variation.value_or(0.0) > comes_and_goes && force && result.forcing[*force].rank > 0) {
        causes[i] = machine::cause_of_peak(peak.tone.frequency, resolutions[c][i], {}, request.modes);
      }
      peak.cause = std::move(causes[i]);
      if (i < each.velocity_peaks.size()) each.velocity_peaks[i].cause = peak.cause;
    }
  }
}

void judge(SpectrumResult& result, const SpectrumRequest& request) {
  std::vector<machine::SeverityVerdict> verdicts;
  std::vector<std::size_t> whose;
  for (std::size_t c = 0; c < result.channels.size(); ++c) {
    ChannelSpectrum& each = result.channels[c];
    judge_channel(each, request, result.speed);
    if (each.typical) result.typical_ranges = machine::typical_ranges();
    if (!each.severity) continue;
    verdicts.push_back(each.severity->verdict);
    whose.push_back(c);
  }
  if (const auto worst = machine::worst_point(verdicts)) result.worst = whose[*worst];
}

bool has_bearings(const std::optional<machine::Machine>& machine) { return machine && !machine->bearings.empty(); }

}  // namespace

SpectrumResult spectrum(const recording::Reader& reader, const SpectrumRequest& asked, const base::Context& context) {
  const auto machine = machine_of(asked);
  SpectrumRequest request = asked;
  if (machine) request.site.machine = machine;  // with the speed of this recording, for bands and limits too
  SpectrumResult result;
  result.recording = reader.recording();
  result.range = frames_of(result.recording, request.part);
  result.detector = request.detector;
  result.max_frequency_hz = request.max_frequency_hz;
  result.findings = result.recording.findings;
  result.options = informed(request.options, machine);
  result.choice = spectral::choose_block(result.recording, result.range, result.options);
  result.options.block_frames = result.choice.length;

  measure(result, reader, request, context);
  std::vector<std::vector<double>> resolutions;
  find_peaks(result, reader, request, resolutions, context);
  if (request.background.reader != nullptr) add_background(result, request.background, request.site, context);
  find_families(result);
  if (machine) find_speed(result, reader, *machine, request, resolutions, context);
  if (result.speed) result.forcing = machine::forcing_frequencies(*machine, *result.speed);
  find_causes(result, request, resolutions);
  judge(result, request);
  if (machine || !request.reference.empty()) add_deflections(result, reader, request.reference, context);
  if (request.envelope || has_bearings(machine)) {
    add_envelopes(result, reader, request.envelope.value_or(EnvelopeRequest{}), context);
  }
  if (request.zoom_hz) add_zoom(result, reader, *request.zoom_hz, context);
  if (request.synchronous) add_synchronous(result, reader, *request.synchronous, context);
  if (machine && request.site.machine) result.causes = diagnosed(result, request.site, request.modes);
  for (ChannelSpectrum& each : result.channels) {
    std::stable_sort(each.peaks.begin(), each.peaks.end(), [](const SpectralPeak& a, const SpectralPeak& b) {
      return a.tone.amplitude_rms.value > b.tone.amplitude_rms.value;
    });
    if (each.peaks.size() > request.peaks) each.peaks.resize(request.peaks);
  }
  return result;
}

}  // namespace stillmass::step
