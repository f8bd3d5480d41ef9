#include "stillmass/spectral/tone.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include "stillmass/spectral/quantity.hpp"

#include "spectral/line_noise.hpp"
#include "spectral/measured.hpp"
#include "spectral/tone_fit.hpp"
#include "spectral/tone_refine.hpp"
#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

/// What noise of K independent averages exceeds on one line in a million, over its mean: Wilson & Hilferty 1931,
/// 4.75 the normal quantile.
double noise_reach(double averages) {
  const double a = 1.0 / (9.0 * averages);
  return std::pow(1.0 - a + 4.75 * std::sqrt(a), 3);
}

/// The deepest valley that parts line k from higher ground, within `reach` lines: the higher one of both sides.
double saddle(std::span<const double> density, std::size_t k, std::size_t reach) {
  const auto valley = [&](int step) {
    double lowest = density[k];
    auto j = static_cast<std::ptrdiff_t>(k);
    for (std::size_t i = 0; i < reach; ++i) {
      j += step;
      if (j < 0 || j >= static_cast<std::ptrdiff_t>(density.size())) break;
      const double here = density[static_cast<std::size_t>(j)];
      if (here > density[k]) break;
      lowest = std::min(lowest, here);
    }
    return lowest;
  };
  return std::max(valley(-1), valley(1));
}

std::vector<std::size_t> peaks(const Spectrum& s, std::span<const double> floor, const ToneOptions& options) {
  constexpr std::size_t most = 500;  // more peaks than that are no list of tones
  const auto lobe = static_cast<std::size_t>(lobe_bins(s.window));
  const double reach = noise_reach(s.effective_averages);
  const double least = std::max(options.prominence, reach);
  std::vector<std::size_t> found;
  for (std::size_t k = std::max(s.first_line, lobe); k + 3 < s.density.size(); ++k) {
    const double here = s.density[k];
    if (!(here >= s.density[k - 1] && here > s.density[k + 1] && here > least * floor[k])) continue;
    if (here > reach * saddle(s.density, k, floor_lines(s.window))) found.push_back(k);
  }
  std::stable_sort(found.begin(), found.end(), [&](auto a, auto b) { return s.density[a] > s.density[b]; });
  if (found.size() > most) found.resize(most);
  return found;
}

/// True where the peak is nothing but a side lobe of the tones before it (6 dB margin), or within their main lobe.
bool is_leakage(const Spectrum& s, const std::vector<Tone>& stronger, std::size_t k) {
  constexpr double margin = 4.0;
  double leaked = 0.0;
  for (const Tone& tone : stronger) {
    const double distance = std::abs(s.frequency(k) - tone.frequency.value) / s.line_hz;
    if (distance < lobe_bins(s.window)) return true;
    const double amplitude = tone.amplitude_rms.value * transform_envelope(s.window, distance);
    leaked += amplitude * amplitude;
  }
  return s.density[k] * s.noise_bandwidth_hz < margin * leaked;
}

/// One value leaves a sorted list, another one comes in: what lies between their places moves up or down by one.
void replace_in_sorted(std::vector<double>& sorted, double leaving, double coming) {
  auto at = std::lower_bound(sorted.begin(), sorted.end(), leaving);
  if (at == sorted.end()) --at;  // of densities that overflowed
  for (; at + 1 != sorted.end() && at[1] < coming; ++at) at[0] = at[1];
  for (; at != sorted.begin() && at[-1] > coming; --at) at[0] = at[-1];
  *at = coming;
}

/// Of the measured signal to the spectrum's own quantity.
Tone converted(Tone tone, const Spectrum& spectrum) {
  const double factor = std::abs(integration_factor(spectrum.integrations, tone.frequency.value));
  tone.amplitude_rms.value *= factor;
  tone.amplitude_rms.quantity = spectrum.quantity;
  const double by_frequency =
      spectrum.integrations * tone.frequency.u.value_or(0.0) / tone.frequency.value * tone.amplitude_rms.value;
  if (tone.amplitude_rms.u) tone.amplitude_rms.u = std::hypot(*tone.amplitude_rms.u * factor, by_frequency);
  tone.floor_density *= factor * factor;
  return tone;
}

}  // namespace

std::size_t floor_lines(Window window) {
  return std::max<std::size_t>(24, 8 * static_cast<std::size_t>(lobe_bins(window)));
}

double median_over_mean(double averages) { return std::pow(1.0 - 1.0 / (9.0 * std::max(averages, 1.0)), 3); }

Spectrum as_measured(const Spectrum& spectrum) {
  using base::Quantity;
  if (spectrum.integrations == 0) return spectrum;
  for (const Quantity quantity : {Quantity::acceleration, Quantity::velocity, Quantity::displacement}) {
    if (integrations_between(quantity, spectrum.quantity) == spectrum.integrations) {
      return as_quantity(spectrum, quantity);
    }
  }
  return spectrum;
}

std::vector<double> noise_floor(const Spectrum& spectrum) {
  const Spectrum measured = as_measured(spectrum);
  const std::size_t lines = measured.density.size();
  const std::size_t from = std::max(measured.first_line, static_cast<std::size_t>(lobe_bins(measured.window)));
  std::vector<double> floor(lines, 0.0);
  if (from >= lines) return floor;
  const double skew = median_over_mean(measured.effective_averages);
  const std::size_t width = std::min(2 * floor_lines(measured.window) + 1, lines - from);
  const std::span<const double> density(measured.density);
  std::vector<double> around(density.begin() + static_cast<std::ptrdiff_t>(from),
                             density.begin() + static_cast<std::ptrdiff_t>(from + width));
  std::sort(around.begin(), around.end());
  for (std::size_t k = from, first = from; k < lines; ++k) {
    const std::size_t wanted = std::clamp(k < width / 2 ? 0 : k - width / 2, from, lines - width);
    for (; first < wanted; ++first) replace_in_sorted(around, density[first], density[first + width]);
    floor[k] = around[width / 2] / skew * std::norm(integration_factor(spectrum.integrations, spectrum.frequency(k)));
  }
  return floor;
}

std::vector<Tone> tones(const Spectrum& spectrum, const ToneOptions& options) {
  if (spectrum.blocks == 0 || spectrum.averaging == Averaging::peak_hold) return {};
  const Spectrum measured = as_measured(spectrum);
  const auto floor = noise_floor(measured);
  const LineNoise noise(measured);
  std::vector<Tone> found;
  for (const std::size_t k : peaks(measured, floor, options)) {
    if (!is_leakage(measured, found, k)) found.push_back(fit_tone(measured, floor, noise, k));
  }
  refine(measured, noise, found);
  for (Tone& tone : found) tone = converted(std::move(tone), spectrum);
  if (options.band_hz) {
    // Tones outside count while those inside are fitted: they leak in.
    std::erase_if(found, [&](const Tone& tone) { return !options.band_hz->contains(spectrum.frequency(tone.line)); });
  }
  std::stable_sort(found.begin(), found.end(),
                   [](const Tone& a, const Tone& b) { return a.amplitude_rms.value > b.amplitude_rms.value; });
  if (found.size() > options.strongest) found.resize(options.strongest);
  return found;
}

}  // namespace stillmass::spectral
