#pragma once

#include <complex>
#include <numbers>
#include <string>
#include <vector>

#include "stillmass/machine/diagnosis.hpp"

// Facts put together by hand, for tests.
namespace stillmass::test {

inline base::Estimate estimate(double value, std::optional<double> u = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  return out;
}

inline modal::Mode mode(double frequency, double zeta, double u = 0.05) {
  modal::Mode out;
  out.frequency = estimate(frequency, u);
  out.damping_ratio = estimate(zeta);
  out.state = "running";
  return out;
}

// A four-pole pump at 24.63 Hz with 6 vanes, without a channel.
inline machine::Facts pump() {
  machine::Facts out;
  out.machine.kind = machine::MachineKind::pump;
  out.machine.line_frequency_hz = 50.0;
  out.machine.motor_poles = 4;
  out.machine.vanes = 6;
  out.speed = estimate(24.63, 0.01);
  out.forcing = machine::forcing_frequencies(out.machine, *out.speed);
  return out;
}

// A channel at a named point ("pump-de-h") with its level in m/s.
inline machine::ChannelFacts& add_channel(machine::Facts& to, const std::string& point, double level) {
  machine::ChannelFacts& channel = to.channels.emplace_back();
  const machine::Placed placed = machine::placed(point);
  channel.name = point;
  channel.place = placed.place;
  channel.rotor = placed.rotor;
  channel.direction = placed.direction;
  channel.velocity = estimate(level);
  channel.line_hz = 0.25;
  return channel;
}

inline void add_tone(machine::Facts& to, std::size_t channel, double frequency, double velocity) {
  machine::CausedTone tone;
  tone.frequency = estimate(frequency, 0.02);
  tone.amplitude = estimate(velocity);
  tone.cause = machine::cause_of_peak(tone.frequency, 0.25, to.forcing, to.modes);
  to.channels[channel].tones.push_back(tone);
}

// The channel leads the reference by so much.
inline void add_phase(machine::Facts& to, const std::string& channel, const std::string& reference, double lead_deg,
                      double order = 1.0, double coherence = 0.99) {
  to.phases.push_back({channel, reference, order, std::polar(1.0, lead_deg * std::numbers::pi / 180.0), {}, coherence});
}

inline const base::Finding* find(const std::vector<base::Finding>& list, base::Code code) {
  for (const base::Finding& each : list) {
    if (each.code == code) return &each;
  }
  return nullptr;
}

// True where one of the sentences holds the words.
inline bool says(const std::vector<std::string>& sentences, std::string_view words) {
  for (const std::string& each : sentences) {
    if (each.find(words) != std::string::npos) return true;
  }
  return false;
}

}  // namespace stillmass::test
