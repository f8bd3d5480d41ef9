#include "spectral/tone_fit.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

/// Offsets from the peak line of the two lines whose ratio tells where the tone stands, and the range of its place.
struct Pair {
  int low = 0;
  int high = 0;
  base::Interval place;
};

/// Peak and greater neighbour; for the flat-top, whose top tells nothing, the flanks.
Pair pair_for(const Spectrum& s, std::size_t k) {
  if (s.window == Window::flat_top) return {-2, 2, {-1.5, 1.5}};
  if (s.density[k + 1] >= s.density[k - 1]) return {0, 1, {0.0, 0.5}};
  return {-1, 0, {-0.5, 0.0}};
}

double ratio_at(Window window, const Pair& pair, double place) {
  return transform(window, pair.high - place) / transform(window, pair.low - place);
}

double place_of(Window window, const Pair& pair, double ratio) {
  base::Interval inside = pair.place;
  for (int i = 0; i < 60; ++i) {
    (ratio_at(window, pair, inside.middle()) < ratio ? inside.lo : inside.hi) = inside.middle();
  }
  return inside.middle();
}

/// A line next to a tone: r.m.s. amplitude with the floor's power taken off, the floor's power, and by how much the
/// blocks scatter more than a steady tone in this floor does.
struct Line {
  int offset = 0;  ///< from the peak line
  double amplitude = 0.0;
  double noise = 0.0;
  double excess = 1.0;
};

Line line_at(const Spectrum& s, std::span<const double> floor, std::size_t peak, int offset) {
  constexpr std::size_t blocks_that_tell_scatter = 8;
  const auto k = static_cast<std::size_t>(static_cast<std::ptrdiff_t>(peak) + offset);
  const double all = s.density[k] * s.noise_bandwidth_hz;
  Line line{offset, 0.0, floor[k] * s.noise_bandwidth_hz, 1.0};
  const double power = std::max(all - line.noise, 0.0);
  line.amplitude = std::sqrt(power);
  // Of one block with tone t and noise n of mean power s: var |t + n|^2 = 2 |t|^2 s + s^2.
  const double variance = line.noise * (2.0 * power + line.noise);
  if (!s.spread.empty() && s.blocks >= blocks_that_tell_scatter && variance > 0.0) {
    line.excess = std::max(s.spread[k] * all / std::sqrt(variance), 1.0);
  }
  return line;
}

/// Where the tone stands, in lines from the peak line.
double place_between(const Spectrum& s, const Pair& pair, const Line& low, const Line& high) {
  return low.amplitude > 0.0 ? place_of(s.window, pair, high.amplitude / low.amplitude) : pair.place.hi;
}

/// The line nearest to the tone. On the flat top of that window noise decides which line is the highest.
std::size_t nearest_line(const Spectrum& s, std::span<const double> floor, std::size_t peak) {
  const Pair pair = pair_for(s, peak);
  const double place = place_between(s, pair, line_at(s, floor, peak, pair.low), line_at(s, floor, peak, pair.high));
  return static_cast<std::size_t>(static_cast<std::ptrdiff_t>(peak) + std::clamp(std::lround(place), -1L, 1L));
}

/// Covariance of the errors of the amplitudes of two lines of a tone `place` lines from the peak line.
double covariance(const LineNoise& noise, const Line& a, const Line& b, double place) {
  const auto apart = static_cast<std::size_t>(std::abs(a.offset - b.offset));
  const double level = std::sqrt(a.noise * b.noise);
  if (level == 0.0) return 0.0;
  const double middle = 0.5 * (a.offset + b.offset) - place;
  // The root of a power near 0 that is known to s scatters by about the root of s.
  const double least = std::sqrt(level) * std::pow(noise.of_power(0), 0.25);
  const double amplitudes = std::max(a.amplitude, least) * std::max(b.amplitude, least);
  const double in_phase = 0.5 * level * noise.beside_tone(apart, middle);
  const double of_power = 0.25 * level * level / amplitudes * noise.of_power(apart);
  return a.excess * b.excess * (in_phase + of_power);
}

}  // namespace

Tone fit_tone(const Spectrum& s, std::span<const double> floor, const LineNoise& noise, std::size_t k) {
  if (s.window == Window::flat_top) k = nearest_line(s, floor, k);
  const Pair pair = pair_for(s, k);
  const std::array<Line, 3> lines{line_at(s, floor, k, pair.low), line_at(s, floor, k, pair.high),
                                  line_at(s, floor, k, 0)};
  const auto& [low, high, peak] = lines;
  const double place = place_between(s, pair, low, high);
  const double gain = transform(s.window, place);
  const double value = peak.amplitude / gain;

  // Place and amplitude as linear functions of the errors of the three amplitudes.
  constexpr double h = 1e-5;
  const auto slope_of = [&](int offset) {
    return (transform(s.window, offset - place - h) - transform(s.window, offset - place + h)) / (2.0 * h);
  };
  const double at_low = transform(s.window, pair.low - place);
  const double at_high = transform(s.window, pair.high - place);
  const double slope = value * (slope_of(pair.high) * at_low - at_high * slope_of(pair.low));
  const double gain_slope = slope_of(0);
  const std::array<double, 3> on_place{-at_high / slope, at_low / slope, 0.0};
  std::array<double, 3> on_value{0.0, 0.0, 1.0 / gain};
  for (std::size_t i = 0; i < 3; ++i) on_value[i] -= value * gain_slope / gain * on_place[i];
  const auto deviation = [&](const std::array<double, 3>& weights) {
    double variance = 0.0;
    for (std::size_t i = 0; i < 3; ++i) {
      for (std::size_t j = 0; j < 3; ++j) {
        variance += weights[i] * weights[j] * covariance(noise, lines[i], lines[j], place);
      }
    }
    return std::sqrt(std::max(variance, 0.0));
  };

  Tone tone;
  tone.line = k;
  tone.frequency = {(static_cast<double>(k) + place) * s.line_hz, deviation(on_place) * s.line_hz, std::nullopt,
                    base::Quantity::frequency};
  tone.amplitude_rms = {value, deviation(on_value), std::nullopt, s.quantity};
  tone.floor_density = floor[k];
  tone.prominence = floor[k] > 0.0 ? s.density[k] / floor[k] : 0.0;
  if (!s.spread.empty()) tone.spread = s.spread[k];

  const auto reach = static_cast<std::size_t>(lobe_bins(s.window));
  double under_peak = 0.0;
  for (std::size_t j = k - std::min(k, reach); j <= std::min(k + reach, s.density.size() - 1); ++j) {
    under_peak += (s.density[j] - floor[j]) * s.line_hz;
  }
  tone.breadth = value > 0.0 ? std::max(under_peak, 0.0) / (value * value) : 1.0;
  return tone;
}

}  // namespace stillmass::spectral
