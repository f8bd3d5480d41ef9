#include "machine/measured_facts.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/numeric/fir.hpp"
#include "stillmass/numeric/statistics.hpp"
#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::test {
namespace {

using Complex = std::complex<double>;

constexpr double line_hz = 0.5;
constexpr base::Interval level_band_hz{10.0, 1000.0};
constexpr double high_hz = 1000.0;
constexpr double turns_u_hz = 0.003;

spectral::SpectrumOptions options() {
  spectral::SpectrumOptions out;
  out.resolution_hz = line_hz;
  return out;
}

double power_of(const std::vector<spectral::Tone>& tones, base::Interval band_hz) {
  double power = 0.0;
  for (const spectral::Tone& tone : tones) {
    if (band_hz.contains(tone.frequency.value)) power += tone.amplitude_rms.value * tone.amplitude_rms.value;
  }
  return power;
}

double without(double rms, double power) { return std::sqrt(std::max(0.0, rms * rms - power)); }

// Above 1 kHz, rectified: its low frequencies are the envelope's, its mean that of the envelope, both times 2 / pi.
std::vector<machine::EnvelopeTone> envelope(const std::vector<double>& acceleration, double rate_hz,
                                            const machine::Facts& facts) {
  static const std::vector<double> taps = numeric::kaiser_low_pass(900.0 / 8192.0, 1300.0 / 8192.0, 60.0);
  numeric::Decimator low(taps, 1);
  std::vector<double> slow;
  low.push(acceleration, slow);
  low.finish(slow);
  std::vector<double> rectified(acceleration.size());
  double mean = 0.0;
  for (std::size_t i = 0; i < rectified.size(); ++i) {
    rectified[i] = std::abs(acceleration[i] - slow[i]);
    mean += rectified[i] / static_cast<double>(rectified.size());
  }
  for (double& each : rectified) each -= mean;
  const auto spectrum = spectral::averaged_spectrum(rectified, rate_hz, base::Quantity::acceleration, options());
  std::vector<machine::EnvelopeTone> out;
  for (const spectral::Tone& tone : spectral::tones(spectrum, {20, 4.0, base::Interval{3.0, 900.0}})) {
    machine::EnvelopeTone& each = out.emplace_back();
    each.frequency = tone.frequency;
    each.depth = std::sqrt(2.0) * tone.amplitude_rms.value / mean;
    each.cause = machine::cause_of_peak(tone.frequency, line_hz, facts.forcing);
  }
  return out;
}

// Complex amplitudes of an order in blocks of one second, Hann window.
std::vector<Complex> order_blocks(const std::vector<double>& samples, double rate_hz, double frequency) {
  const auto length = static_cast<std::size_t>(rate_hz);
  std::vector<double> window(length);
  for (std::size_t i = 0; i < length; ++i) {
    window[i] = 1.0 - std::cos(2.0 * std::numbers::pi * static_cast<double>(i) / static_cast<double>(length));
  }
  std::vector<Complex> out;
  const Complex step = std::polar(1.0, -2.0 * std::numbers::pi * frequency / rate_hz);
  Complex turn = 1.0;
  for (std::size_t from = 0; from + length <= samples.size(); from += length) {
    Complex sum = 0.0;
    for (std::size_t i = 0; i < length; ++i) {
      sum += window[i] * samples[from + i] * turn;
      turn *= step;
    }
    out.push_back(sum);
  }
  return out;
}

double power(const std::vector<Complex>& blocks) {
  double sum = 0.0;
  for (const Complex& each : blocks) sum += std::norm(each);
  return sum;
}

// Against the channel that moves most at this order.
void add_phases(machine::Facts& facts, const SimulatedMachine& from, double order) {
  std::vector<std::vector<Complex>> blocks;
  for (const SimulatedChannel& channel : from.channels) {
    blocks.push_back(order_blocks(channel.acceleration, from.rate_hz, order * from.speed_hz));
  }
  const auto reference = static_cast<std::size_t>(
      std::max_element(blocks.begin(), blocks.end(), [](const auto& a, const auto& b) { return power(a) < power(b); }) -
      blocks.begin());
  for (std::size_t c = 0; c < blocks.size(); ++c) {
    if (c == reference) continue;
    Complex xy = 0.0;
    for (std::size_t b = 0; b < blocks[c].size(); ++b) xy += blocks[c][b] * std::conj(blocks[reference][b]);
    const double xx = power(blocks[reference]);
    facts.phases.push_back({from.channels[c].point,
                            from.channels[reference].point,
                            order,
                            xy / xx,
                            {},
                            std::norm(xy) / (xx * power(blocks[c]))});
  }
}

void fill(machine::ChannelFacts& channel, const SimulatedChannel& from, double rate_hz, const machine::Facts& facts) {
  const auto measured =
      spectral::averaged_spectrum(from.acceleration, rate_hz, base::Quantity::acceleration, options());
  const auto velocity = spectral::as_quantity(measured, base::Quantity::velocity, 5.0);
  const auto tones = spectral::tones(velocity, {40, 4.0, base::Interval{5.0, 1000.0}});
  for (const spectral::Tone& tone : tones) {
    channel.tones.push_back({tone.frequency, tone.amplitude_rms,
                             machine::cause_of_peak(tone.frequency, line_hz, facts.forcing, facts.modes), false});
  }
  channel.line_hz = line_hz;
  channel.velocity = spectral::band_rms(velocity, level_band_hz);
  channel.noise_velocity = without(channel.velocity->value, power_of(tones, level_band_hz));
  const base::Interval high{high_hz, 0.45 * rate_hz};
  channel.acceleration = spectral::band_rms(measured, {5.0, high.hi}).value;
  channel.noise_acceleration =
      without(spectral::band_rms(measured, high).value, power_of(spectral::tones(measured, {40, 4.0, high}), high));
  channel.kurtosis = numeric::kurtosis(from.acceleration);
  channel.envelope = envelope(from.acceleration, rate_hz, facts);
}

}  // namespace

machine::Facts measured_facts(const SimulatedMachine& from) {
  machine::Facts out;
  out.machine = from.machine;
  out.modes = from.modes;
  out.soft_foot = from.soft_foot;
  base::Estimate speed;
  speed.value = from.speed_hz + turns_u_hz;  // off by one standard uncertainty
  speed.u = turns_u_hz;
  out.speed = speed;
  out.forcing = machine::forcing_frequencies(out.machine, speed);
  for (const SimulatedChannel& channel : from.channels) {
    machine::ChannelFacts& each = out.channels.emplace_back();
    const machine::Placed placed = machine::placed(channel.point);
    each.name = channel.point;
    each.place = placed.place;
    each.rotor = placed.rotor;
    each.direction = placed.direction;
    each.on_bearing_housing = true;
    each.bearings = {placed.rotor + " bearing"};
    if (from.smooth_limit > 0.0) each.smooth_limit = from.smooth_limit;
    if (placed.rotor == "motor") each.power_cut = from.power_cut;
    fill(each, channel, from.rate_hz, out);
  }
  add_phases(out, from, 1.0);
  add_phases(out, from, 2.0);
  return out;
}

machine::Facts spectra_alone(machine::Facts facts) {
  facts.phases.clear();
  facts.modes.clear();
  facts.soft_foot = machine::TestOutcome::not_made;
  for (machine::ChannelFacts& channel : facts.channels) channel.power_cut = machine::TestOutcome::not_made;
  return facts;
}

}  // namespace stillmass::test
