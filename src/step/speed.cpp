#include "step/speed.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "step/fine_tones.hpp"
#include "step/peaks.hpp"

namespace stillmass::step {
namespace {

using base::Estimate;
using base::Interval;
using base::Quantity;

constexpr double much_wander = 0.005;  // of the speed: lines are smeared (common practice)
constexpr double coarse = 0.25;        // of the speed: lines so far apart do not show it

// Where the speed must be and no line stands, the whole length of the recording may still part one from a stronger
// neighbour. What it finds joins the peaks.
void look_where_the_speed_must_be(SpectrumResult& result, const recording::Reader& reader,
                                  const machine::Machine& machine, const base::Context& context) {
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
      add_peak(channel, close, "parted from its neighbour with the whole length of the recording");
    }
  }
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

// From the lines of all channels together.
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

}  // namespace

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

void find_speed(SpectrumResult& result, const recording::Reader& reader, const machine::Machine& machine,
                const SpectrumRequest& request, const base::Context& context) {
  auto found = speed_of(result, machine);
  if (!found) {
    look_where_the_speed_must_be(result, reader, machine, context);
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

}  // namespace stillmass::step
