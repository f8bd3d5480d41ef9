#include "step/extras.hpp"

#include <algorithm>
#include <cmath>
#include <set>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/spectral/block_plan.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "step/levels.hpp"

namespace stillmass::step {
namespace {

using base::Interval;
using base::Quantity;

constexpr std::size_t most_shapes = 8;       // forcing frequencies of which the deflection is given
constexpr std::size_t most_background = 60;  // tones looked for in the background
constexpr std::size_t most_envelope = 15;    // lines of an envelope

// The channel of another recording that is the same point, else (where one of them has no point) of the same name.
std::optional<std::size_t> same_channel(const recording::Recording& recording, const recording::Channel& wanted) {
  for (std::size_t c = 0; c < recording.channels.size(); ++c) {
    const recording::Channel& each = recording.channels[c];
    if (each.role != wanted.role) continue;
    const bool by_point = !wanted.point.empty() && !each.point.empty();
    if (by_point ? each.point == wanted.point : each.name == wanted.name) return c;
  }
  return {};
}

std::vector<spectral::Tone> tones_of(const std::vector<SpectralPeak>& peaks) {
  std::vector<spectral::Tone> out;
  for (const SpectralPeak& peak : peaks) out.push_back(peak.tone);
  return out;
}

// Of tones that a finer look parted and the background's lines did not, the nearest alone is the background's.
void mark(std::vector<SpectralPeak>& peaks, const std::vector<spectral::Tone>& background, double line_hz) {
  const auto partners = spectral::background_tones(tones_of(peaks), background, line_hz);
  const auto distance = [&](const spectral::BackgroundTone& each) {
    return std::abs(peaks[each.running].tone.frequency.value - background[each.background].frequency.value);
  };
  for (const spectral::BackgroundTone& each : partners) {
    const bool is_nearest = std::none_of(partners.begin(), partners.end(), [&](const spectral::BackgroundTone& other) {
      return other.background == each.background && distance(other) < distance(each);
    });
    if (is_nearest) peaks[each.running].background = each;
  }
}

// Lines of an envelope at multiples of a bearing's frequency that stands there itself.
void name_multiples(std::vector<EnvelopePeak>& peaks, const std::vector<machine::Forcing>& forcing, double line_hz) {
  constexpr double greatest = 12.0;
  for (const EnvelopePeak& first : peaks) {
    if (!first.cause.forcing) continue;
    const machine::Forcing& force = forcing[*first.cause.forcing];
    if (force.kind != machine::ForcingKind::bearing || force.harmonic != 1) continue;
    for (EnvelopePeak& other : peaks) {
      if (other.cause.text != machine::unexplained) continue;
      const double number = std::round(other.tone.frequency.value / first.tone.frequency.value);
      const double off = std::abs(other.tone.frequency.value - number * first.tone.frequency.value);
      if (number < 2.0 || number > greatest ||
          off > std::max(std::min(line_hz, 0.1 * first.tone.frequency.value),
                         3.0 * number * first.tone.frequency.u.value_or(0.0)))
        continue;
      other.cause.text = fmt::format("{:.0f}x {}", number, force.name);
    }
  }
}

}  // namespace

void add_background(SpectrumResult& result, const BackgroundRequest& request, const Site& site,
                    const base::Context& context) {
  const recording::Recording& recording = request.reader->recording();
  spectral::SpectrumOptions options = result.options;
  options.averaging = spectral::Averaging::mean;
  if (recording.rate_hz != result.recording.rate_hz) {
    options.block_frames = spectral::fast_length_at_least(
        static_cast<std::size_t>(std::ceil(recording.rate_hz / result.choice.line_hz - 1e-9)));
  }
  const recording::FrameRange range = frames_of(recording, request.part);
  if (spectral::count_blocks(recording, range, options.block_frames, options.overlap) == 0) {
    result.refusals.push_back(
        {"no-background",
         fmt::format("the background is shorter than a block of {} s", base::rounded(1.0 / result.choice.line_hz)),
         "record the stopped machine as long as the running one, or ask for coarser lines"});
    return;
  }
  const auto spectra = spectral::averaged_spectra(*request.reader, range, options, context);
  bool is_compared = false;
  for (ChannelSpectrum& each : result.channels) {
    if (!base::is_motion(each.measured.quantity) || each.measured.density.empty()) continue;
    const auto at = same_channel(recording, each.channel);
    if (!at || spectra[*at].density.empty() || !base::is_motion(spectra[*at].quantity)) continue;
    is_compared = true;
    const spectral::Spectrum shown = in_quantity(spectra[*at], each.shown.quantity);
    const double line_hz = std::max(shown.line_hz, each.shown.line_hz);
    spectral::ToneOptions tone_options;
    tone_options.strongest = most_background;
    const auto found = spectral::tones(shown, tone_options);
    mark(each.peaks, found, line_hz);
    mark(each.velocity_peaks, spectral::tones(in_quantity(spectra[*at], Quantity::velocity), tone_options), line_hz);
    const bool same_lines = std::abs(shown.line_hz - each.shown.line_hz) <= 1e-9 * each.shown.line_hz;
    if (same_lines && shown.density.size() == each.shown.density.size()) each.background_density = shown.density;
    const spectral::Spectrum running = in_quantity(each.measured, Quantity::velocity);
    const spectral::Spectrum stopped = in_quantity(spectra[*at], Quantity::velocity);
    const auto band = held(running, standard_band(site));
    const auto both = band ? held(stopped, *band) : band;
    if (both && running.averaging == spectral::Averaging::mean) {
      each.background = spectral::without_background(running, stopped, *both);
    }
  }
  if (!is_compared) {
    result.refusals.push_back({"no-background", "no channel of the background is one of this recording",
                               "name points or channels of both recordings alike"});
  }
}

void add_deflections(SpectrumResult& result, const recording::Reader& reader, const std::string& reference,
                     const base::Context& context) {
  std::size_t moving = 0;
  spectral::DeflectionOptions options;
  options.window = result.options.window;
  options.overlap = result.options.overlap;
  options.block_frames = result.choice.length;
  for (std::size_t c = 0; c < result.recording.channels.size(); ++c) {
    const recording::Channel& channel = result.recording.channels[c];
    if (channel.role != recording::Role::vibration || !base::is_motion(channel.unit.quantity)) continue;
    ++moving;
    if (!reference.empty() && (channel.name == reference || channel.point == reference)) options.reference = c;
  }
  if (!reference.empty() && !options.reference) {
    throw base::usage_error(result.recording.file.string(), "no channel of motion is called '" + reference + "'",
                            "name a point or channel of this recording");
  }
  if (moving < 2) {
    if (!reference.empty()) {
      result.refusals.push_back({"one-channel", "a deflection needs two channels of motion at least",
                                 "record the point together with a reference that stays"});
    }
    return;
  }

  // The strongest line of every forcing that was found, largest first; without forcing the strongest lines.
  std::vector<const SpectralPeak*> strongest;
  for (const ChannelSpectrum& channel : result.channels) {
    for (const SpectralPeak& peak : channel.velocity_peaks) {
      if (peak.in_background() || (!result.forcing.empty() && !peak.cause.forcing)) continue;
      strongest.push_back(&peak);
    }
  }
  std::stable_sort(strongest.begin(), strongest.end(), [](const SpectralPeak* a, const SpectralPeak* b) {
    return a->tone.amplitude_rms.value > b->tone.amplitude_rms.value;
  });
  std::vector<OperatingDeflection> wanted;
  std::vector<double> frequencies;
  for (const SpectralPeak* peak : strongest) {
    const double frequency = peak->tone.frequency.value;
    const bool is_near = std::any_of(frequencies.begin(), frequencies.end(), [&](double other) {
      return std::abs(other - frequency) < 4.0 * result.choice.line_hz;
    });
    const bool has_room = spectral::has_room(frequency, result.recording.rate_hz, result.choice.length, options);
    if (is_near || !has_room || frequencies.size() == most_shapes) continue;
    OperatingDeflection each;
    each.name = peak->cause.forcing ? result.forcing[*peak->cause.forcing].name
                                    : fmt::format("{} Hz", base::rounded(frequency, 4));
    if (peak->cause.forcing) each.order = result.forcing[*peak->cause.forcing].order;
    wanted.push_back(std::move(each));
    frequencies.push_back(frequency);
  }
  if (frequencies.empty()) return;
  const auto shapes = spectral::deflections(reader, result.range, frequencies, options, context);
  if (!reference.empty() && std::none_of(shapes.begin(), shapes.end(), [](const auto& each) { return bool(each); })) {
    result.refusals.push_back(shapes.front().refusal());
  }
  for (std::size_t i = 0; i < shapes.size(); ++i) {
    if (!shapes[i]) continue;
    wanted[i].shape = options.reference ? *shapes[i] : spectral::over_the_greatest(*shapes[i]);
    result.shapes.push_back(std::move(wanted[i]));
  }
}

void add_envelopes(SpectrumResult& result, const recording::Reader& reader, const EnvelopeRequest& request,
                   const base::Context& context) {
  std::vector<std::size_t> which;
  std::vector<ChannelSpectrum*> whose;
  for (std::size_t c = 0; c < result.recording.channels.size(); ++c) {
    const recording::Channel& channel = result.recording.channels[c];
    if (channel.role != recording::Role::vibration || channel.unit.quantity != Quantity::acceleration) continue;
    const auto at = std::find_if(result.channels.begin(), result.channels.end(),
                                 [&](const auto& each) { return each.channel.index == channel.index; });
    which.push_back(c);
    whose.push_back(&*at);
  }
  if (which.empty()) {
    result.refusals.push_back({"no-acceleration", "no channel is an acceleration",
                               "say its unit (g or m/s2): the envelope is taken of the acceleration"});
    return;
  }
  spectral::EnvelopeOptions options;
  options.band_hz = request.band_hz;
  const auto found = spectral::envelopes(reader, result.range, which, options, context);
  for (std::size_t i = 0; i < found.size(); ++i) {
    EnvelopeResult each;
    each.envelope = found[i].envelope;
    if (each.envelope) {
      spectral::ToneOptions tone_options;
      tone_options.strongest = most_envelope;
      const auto tones = spectral::tones(each.envelope->spectrum, tone_options);
      std::vector<machine::Peak> peaks;
      for (const spectral::Tone& tone : tones) peaks.push_back({tone.frequency, tone.amplitude_rms.value});
      const auto causes = machine::causes_of_peaks(peaks, each.envelope->spectrum.line_hz, result.forcing);
      for (std::size_t t = 0; t < tones.size(); ++t) {
        each.peaks.push_back({tones[t], spectral::modulation_depth(*each.envelope, tones[t]), causes[t]});
      }
    }
    if (each.envelope) name_multiples(each.peaks, result.forcing, each.envelope->spectrum.line_hz);
    whose[i]->envelope = std::move(each);
  }
}

void add_zoom(SpectrumResult& result, const recording::Reader& reader, Interval band_hz, const base::Context& context) {
  spectral::ZoomOptions options;
  options.band_hz = band_hz;
  options.window = result.options.window;
  options.overlap = result.options.overlap;
  const auto zooms = spectral::zoom(reader, result.range, options, context);
  for (std::size_t c = 0; c < zooms.size(); ++c) {
    const int index = result.recording.channels[c].index;
    const auto at = std::find_if(result.channels.begin(), result.channels.end(),
                                 [&](const auto& each) { return each.channel.index == index; });
    if (at == result.channels.end() || zooms[c].blocks == 0) continue;
    at->zoom = base::is_motion(zooms[c].quantity) ? spectral::as_quantity(zooms[c], at->shown.quantity) : zooms[c];
  }
}

void add_synchronous(SpectrumResult& result, const recording::Reader& reader,
                     const rotation::SynchronousSettings& settings, const base::Context& context) {
  const auto average = rotation::synchronous_average(reader, settings, context);
  if (!average) {
    result.refusals.push_back(average.refusal());
    return;
  }
  result.findings.insert(result.findings.end(), average->findings.begin(), average->findings.end());
  for (const rotation::SynchronousAverage& each : average->channels) {
    const auto at = std::find_if(result.channels.begin(), result.channels.end(),
                                 [&](const auto& channel) { return channel.channel.name == each.channel; });
    if (at != result.channels.end() && each.blocks > 0) at->synchronous = each;
  }
}

}  // namespace stillmass::step
