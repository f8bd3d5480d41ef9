#include "stillmass/step/spectrum.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/spectral_quality.hpp"
#include "stillmass/step/diagnosis.hpp"

#include "step/extras.hpp"
#include "step/levels.hpp"
#include "step/peaks.hpp"
#include "step/speed.hpp"

namespace stillmass::step {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;

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
  find_peaks(result, reader, request, context);
  if (request.background.reader != nullptr) add_background(result, request.background, request.site, context);
  find_families(result);
  if (machine) find_speed(result, reader, *machine, request, context);
  if (result.speed) result.forcing = machine::forcing_frequencies(*machine, *result.speed);
  find_causes(result, request);
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
