#include "stillmass/step/diagnosis.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/machine/diagnosis.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "step/levels.hpp"

namespace stillmass::step {
namespace {

using base::Interval;
using base::Quantity;

constexpr double high_frequency_hz = 1000.0;  // above: noise of flow and of bearings (common practice)
constexpr double end_of_flat = 2.56;          // recorders' filters begin at rate / 2.56 (common practice)
constexpr double usual_orders[] = {1.0, 2.0};
constexpr double most_phase_u_deg = 30.0;  // of a line of the synchronous average; above, its phase tells nothing

// What is left of a level without tones, r.m.s.: the floor between them. Tones taken off one by one would leave their
// flanks behind where the speed sways.
std::optional<double> noise_rms(const spectral::Spectrum& spectrum, Interval band) {
  const auto part = held(spectrum, band);
  if (!part) return {};
  const std::vector<double> floor = spectral::noise_floor(spectrum);
  double sum = 0.0;
  for (std::size_t k = spectrum.first_line; k < floor.size(); ++k) {
    if (part->contains(spectrum.frequency(k))) sum += floor[k] * spectrum.line_hz;
  }
  return std::sqrt(sum);
}

void put_noise(machine::ChannelFacts& facts, const ChannelSpectrum& channel, const Site& site) {
  if (channel.severity_velocity) {
    facts.noise_velocity = noise_rms(in_quantity(channel.measured, Quantity::velocity), standard_band(site));
  }
  if (channel.measured.quantity != Quantity::acceleration || channel.measured.density.empty()) return;
  facts.acceleration = channel.features.deviation;
  facts.crest_factor = channel.features.crest_factor;
  facts.kurtosis = channel.features.kurtosis;
  const Interval high{high_frequency_hz, channel.measured.rate_hz / end_of_flat};
  if (high.lo < high.hi) facts.noise_acceleration = noise_rms(channel.measured, high);
}

void put_envelope(machine::ChannelFacts& facts, const ChannelSpectrum& channel) {
  if (!channel.envelope) return;
  if (!channel.envelope->envelope) {
    const std::string& code = channel.envelope->envelope.refusal().code;
    if (code == "no-impulsive-band") facts.envelope.emplace();  // looked for, and nothing there
    return;
  }
  facts.envelope_band_hz = channel.envelope->envelope->band_hz;
  facts.envelope.emplace();
  for (const EnvelopePeak& peak : channel.envelope->peaks) {
    facts.envelope->push_back({peak.tone.frequency, peak.depth.value, peak.cause, false});
  }
}

void put_families(machine::ChannelFacts& facts, const ChannelSpectrum& channel, const SpectrumResult& spectra) {
  const auto is_here = [&](std::size_t tone) {
    const double frequency = spectra.tones[tone].frequency.value;
    return std::any_of(channel.velocity_peaks.begin(), channel.velocity_peaks.end(), [&](const SpectralPeak& peak) {
      return std::abs(peak.tone.frequency.value - frequency) < 0.5 * channel.shown.line_hz;
    });
  };
  for (const spectral::HarmonicFamily& family : spectra.families.harmonics) {
    machine::ToneFamily out{family.fundamental, {}, {}};
    for (const spectral::FamilyMember& member : family.members) {
      if (is_here(member.tone)) out.numbers.push_back(member.number);
    }
    if (out.numbers.size() > 1) facts.families.push_back(std::move(out));
  }
  for (const spectral::SideBandFamily& family : spectra.families.side_bands) {
    machine::ToneFamily out{family.spacing, spectra.tones[family.carrier].frequency, {}};
    for (const spectral::FamilyMember& member : family.members) {
      if (is_here(member.tone)) out.numbers.push_back(member.number);
    }
    if (!out.numbers.empty()) facts.families.push_back(std::move(out));
  }
}

// Slow roll and turn of phase of 1x over a run.
std::optional<machine::SpeedRun> run_of(const ChannelSpectrum& channel, const RunupResult& run) {
  constexpr double slow = 0.25;  // of the highest speed: slow roll (common practice)
  for (const rotation::OrderTrack& track : run.tracks) {
    if (track.order != 1.0 || track.channel != channel.channel.name || track.value.size() < 4) continue;
    if (!base::is_motion(track.quantity)) return {};
    const rotation::OrderTrack moved = rotation::in_quantity(track, Quantity::displacement);
    const auto fastest = std::max_element(moved.speed_hz.begin(), moved.speed_hz.end()) - moved.speed_hz.begin();
    const auto slowest = std::min_element(moved.speed_hz.begin(), moved.speed_hz.end()) - moved.speed_hz.begin();
    const auto at = [&](std::ptrdiff_t i) { return static_cast<std::size_t>(i); };
    machine::SpeedRun out;
    const double full = moved.amplitude_rms(at(fastest));
    const auto stands_out = [&](std::ptrdiff_t i) { return moved.amplitude_rms(at(i)) > 2.0 * moved.noise[at(i)]; };
    if (!stands_out(slowest) || !stands_out(fastest)) return out;
    if (moved.speed_hz[at(slowest)] <= slow * moved.speed_hz[at(fastest)]) {
      out.slow_roll = moved.amplitude_rms(at(slowest)) / full;
    }
    out.phase_change = std::abs(std::arg(moved.value[at(fastest)] / moved.value[at(slowest)]));
    return out;
  }
  return {};
}

machine::TestOutcome outcome(const rotation::PowerCut& cut) {
  switch (cut.verdict) {
    case rotation::PowerCutVerdict::electrical:
      return machine::TestOutcome::confirmed;
    case rotation::PowerCutVerdict::mechanical:
      return machine::TestOutcome::refuted;
    case rotation::PowerCutVerdict::cannot_tell:
      return machine::TestOutcome::not_made;
  }
  return machine::TestOutcome::not_made;
}

const std::string& point_or_name(const ChannelSpectrum& channel) {
  return channel.channel.point.empty() ? channel.channel.name : channel.channel.point;
}

machine::ChannelFacts channel_facts(const ChannelSpectrum& channel, const SpectrumResult& spectra, const Site& site,
                                    const OtherTests& others) {
  machine::ChannelFacts facts;
  facts.name = channel.channel.name;
  const machine::Placed placed = machine::placed(point_or_name(channel));
  facts.place = placed.place;
  facts.rotor = placed.rotor;
  facts.direction = placed.direction;
  if (const SitePoint* point = site.point(channel.channel.point)) {
    if (!point->direction.empty()) facts.direction = point->direction;
    facts.on_bearing_housing = point->on_bearing_housing;
  }
  facts.velocity = channel.severity_velocity;
  if (channel.severity) facts.smooth_limit = channel.severity->limits.velocity[0];
  facts.line_hz = channel.shown.line_hz;
  for (const SpectralPeak& peak : channel.velocity_peaks) {
    facts.tones.push_back({peak.tone.frequency, peak.tone.amplitude_rms, peak.cause, peak.in_background()});
  }
  put_noise(facts, channel, site);
  put_envelope(facts, channel);
  put_families(facts, channel, spectra);
  if (others.run != nullptr) facts.run = run_of(channel, *others.run);
  for (const OtherTests::Cut& cut : others.power_cuts) {
    if (cut.channel != channel.channel.name || outcome(cut.result) == machine::TestOutcome::not_made) continue;
    facts.power_cut = outcome(cut.result);
  }
  return facts;
}

void put_phases(machine::Facts& facts, const SpectrumResult& spectra) {
  const auto name_of = [&](const std::string& point) {
    for (const ChannelSpectrum& each : spectra.channels) {
      if (point_or_name(each) == point) return each.channel.name;
    }
    return point;
  };
  for (const OperatingDeflection& each : spectra.shapes) {
    if (!each.order || std::none_of(std::begin(usual_orders), std::end(usual_orders),
                                    [&](double order) { return order == *each.order; })) {
      continue;
    }
    for (const spectral::Deflection& point : each.shape.points) {
      const auto ratio = point.ratio();
      if (!ratio || point.point == each.shape.reference) continue;
      std::optional<double> u;
      if (point.phase) u = point.phase->u;
      facts.phases.push_back({point.channel, name_of(each.shape.reference), *each.order, *ratio, u, point.coherence});
    }
  }
  for (const ChannelSpectrum& channel : spectra.channels) {
    if (!channel.synchronous || !channel.synchronous->speed_hz) continue;
    const auto n = spectral::integrations_between(channel.synchronous->quantity, Quantity::velocity);
    if (!n) continue;
    for (const rotation::SynchronousLine& line : channel.synchronous->lines) {
      if (line.order != 1.0 && line.order != 2.0) continue;
      if (line.phase_u_deg > most_phase_u_deg) continue;
      const auto factor = spectral::integration_factor(*n, line.order * *channel.synchronous->speed_hz);
      const double u = line.phase_u_deg * std::numbers::pi / 180.0;
      facts.phases.push_back({channel.channel.name, "", line.order, line.value * factor, u, {}});
    }
  }
}

}  // namespace

machine::Facts facts_of(const SpectrumResult& spectra, const Site& site, const std::vector<modal::Mode>& modes,
                        const OtherTests& others) {
  machine::Facts facts;
  if (site.machine) facts.machine = *site.machine;
  facts.speed = spectra.speed;
  facts.forcing = spectra.forcing;
  facts.modes = modes;
  for (const ChannelSpectrum& channel : spectra.channels) {
    const bool is_vibration = channel.channel.role == recording::Role::vibration;
    if (!is_vibration || !base::is_motion(channel.measured.quantity) || channel.measured.density.empty()) continue;
    if (channel.measured.averaging == spectral::Averaging::peak_hold) continue;  // neither levels nor tones
    facts.channels.push_back(channel_facts(channel, spectra, site, others));
  }
  put_phases(facts, spectra);
  return facts;
}

std::vector<base::Finding> diagnosed(const SpectrumResult& spectra, const Site& site,
                                     const std::vector<modal::Mode>& modes, const OtherTests& others) {
  if (!site.machine) return {};
  return machine::diagnose(facts_of(spectra, site, modes, others), machine::diagnosis_rules());
}

}  // namespace stillmass::step
