#include "stillmass/spectral/spectral_quality.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include <fmt/format.h>

#include "stillmass/numeric/statistics.hpp"
#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/quantity.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

namespace {

using base::Code;
using base::Finding;

// All thresholds here: common practice.
constexpr double hum_share = 0.1;        // of the mean square, at supply frequency and its odd harmonics
constexpr double hum_comb_share = 0.01;  // the same where at least three of them stand out
constexpr int hum_comb = 3;
constexpr int hum_harmonics = 9;             // looked at up to this one
constexpr double hum_tolerance = 0.004;      // relative; a supply stays within 0.2 Hz of 50 Hz
constexpr double slope_fall = 4.0;           // density over an octave: steeper than 6 dB
constexpr double slope_spread = 0.4;         // of the blocks' densities on it: near 0 for a tone, 1 for noise
constexpr double slope_share = 0.5;          // of the integrated mean square that lies on the slope
constexpr double top_band = 0.1;             // of the range below rate/2, seen for roll-off
constexpr double no_roll_off = 0.5;          // density of the top over that of the range below it
constexpr double top_share = 0.002;          // of the mean square, so that silence at the top is no suspicion
constexpr double steps_above_noise = 2.0;    // density over that of the stored steps
constexpr double flat_range = 3.0;           // greatest over least density of octaves of mere noise: 5 dB
constexpr double mounting_least_hz = 500.0;  // no sensor rings on its mounting below that
constexpr double mounting_most_hz = 3300.0;  // above, 0.3 of it clears the 1000 Hz of the severity standards
constexpr double mounting_rise = 8.0;        // density of the hump over that two octaves below: 9 dB
constexpr double mounting_fall = 30.0;       // and over that an octave above: 15 dB, a sensor falls 40 dB a decade
constexpr double mounting_lost = 0.5;        // density an octave above over that two octaves below
constexpr double stationary_spread = 2.0;    // of the blocks' densities; 1 for Gaussian noise
constexpr double anti_alias = 0.78;          // of rate/2: filters begin there

Finding finding(Code code, const Spectrum& s, base::Strength strength, std::string text) {
  return {.code = code,
          .text = std::move(text),
          .channel = s.channel,
          .from_s = {},
          .to_s = {},
          .strength = strength,
          .evidence = {}};
}

double mean_density(const Spectrum& s, double from_hz, double to_hz) {
  const base::Interval band{from_hz, to_hz};
  const double rms = band_rms(s, band).value;
  return rms * rms / band.width();
}

/// Of the lines from one frequency up to, not including, the other.
double median_density(const Spectrum& s, double from_hz, double to_hz) {
  const auto line = [&](double f) { return static_cast<std::ptrdiff_t>(std::lround(f / s.line_hz)); };
  std::vector<double> density(s.density.begin() + line(from_hz), s.density.begin() + line(to_hz));
  const auto middle = density.begin() + static_cast<std::ptrdiff_t>(density.size() / 2);
  std::nth_element(density.begin(), middle, density.end());
  return *middle;
}

double mean_square_above_zero(const Spectrum& s) {
  const double rms = band_rms(s, {least_low_limit_hz(s), 0.5 * s.rate_hz}).value;
  return rms * rms;
}

struct Hum {
  double mean_square = 0.0;
  int harmonics = 0;  // odd ones that stand out, the first counted
};

/// The tones at odd multiples of the supply's frequency, if that frequency itself is there. Even multiples are left
/// out: twice the supply's frequency is a force that motors really have.
Hum hum(std::span<const Tone> tones, double supply_hz) {
  Hum sum;
  bool has_fundamental = false;
  for (const Tone& tone : tones) {
    for (int k = 1; k <= hum_harmonics; k += 2) {
      const double tolerance = hum_tolerance * k * supply_hz + 2.0 * tone.frequency.u.value_or(0.0);
      if (std::abs(tone.frequency.value - k * supply_hz) > tolerance) continue;
      sum.mean_square += tone.amplitude_rms.value * tone.amplitude_rms.value;
      ++sum.harmonics;
      has_fundamental = has_fundamental || k == 1;
      break;
    }
  }
  return has_fundamental ? sum : Hum{};
}

std::optional<Finding> mains_hum(const Spectrum& s, std::optional<double> line_frequency_hz) {
  const auto peaks = tones(s, {.strongest = 50, .prominence = 10.0, .band_hz = {}});
  const double all = mean_square_above_zero(s);
  std::vector<double> supplies{50.0, 60.0};
  if (line_frequency_hz) supplies = {*line_frequency_hz};
  for (const double supply : supplies) {
    const Hum found = hum(peaks, supply);
    const double share = found.mean_square / all;
    if (share < (found.harmonics >= hum_comb ? hum_comb_share : hum_share)) continue;
    return finding(Code::mains_hum, s, share > 0.5 ? base::Strength::strong : base::Strength::fair,
                   fmt::format("{:.2g} % of the signal's power stands at {:.4g} Hz and its odd harmonics, where the "
                               "electric supply is (or a shaft that turns exactly with it)",
                               100.0 * share, supply));
  }
  return std::nullopt;
}

std::optional<Finding> low_frequency_slope(const Spectrum& s) {
  const auto end = slope_end_hz(s);
  if (!end) return std::nullopt;
  return finding(
      Code::low_frequency_slope, s, base::Strength::fair,
      fmt::format("the acceleration rises towards 0 Hz below {:.3g} Hz so that integrated velocity is mostly "
                  "this slope",
                  *end));
}

std::optional<Finding> aliasing(const Spectrum& s) {
  const double top = 0.5 * s.rate_hz;
  const double at_top = mean_density(s, (1.0 - top_band) * top, top);
  const double below = mean_density(s, 0.5 * top, 0.8 * top);
  const double share = at_top * top_band * top / mean_square_above_zero(s);
  if (!(at_top > no_roll_off * below && share > top_share)) return std::nullopt;
  return finding(
      Code::aliasing_suspected, s, base::Strength::weak,
      fmt::format("the spectrum does not fall off towards half the sampling rate ({:.4g} Hz), where {:.2g} % "
                  "of the power still stands",
                  top, 100.0 * share));
}

/// Nothing but noise: no tone stands out, and the octaves are equally dense.
std::optional<Finding> mere_noise(const Spectrum& s) {
  const double top = anti_alias * 0.5 * s.rate_hz;
  std::vector<double> octaves;
  for (double hi = top; 0.5 * hi > std::max(10.0, 8.0 * s.line_hz); hi *= 0.5) {
    octaves.push_back(mean_density(s, 0.5 * hi, hi));
  }
  constexpr std::size_t enough = 4;
  if (octaves.size() < enough) return std::nullopt;
  const auto [least, most] = std::minmax_element(octaves.begin(), octaves.end());
  if (*most > flat_range * *least || !tones(s, {.strongest = 1, .prominence = 10.0, .band_hz = {}}).empty()) {
    return std::nullopt;
  }
  return finding(Code::near_noise_floor, s, base::Strength::weak,
                 fmt::format("the spectrum is flat within {:.1f} dB and no line stands out of it: the noise of sensor "
                             "or recorder looks like that, a machine does not",
                             10.0 * std::log10(*most / *least)));
}

bool is_stationary(const Spectrum& s) {
  if (s.spread.size() < 2) return false;
  std::vector<double> spread(s.spread.begin() + 1, s.spread.end());
  return numeric::median(std::move(spread)) < stationary_spread;
}

/// A single hump with little above: a sensor on a soft mounting follows up to its resonance and not beyond it. A
/// resonance of the structure leaves what is above it as high as what is below.
std::optional<Finding> mounting_resonance(const Spectrum& s) {
  if (!is_stationary(s)) return std::nullopt;  // blows have a hump and a fall of their own
  const double top = anti_alias * 0.5 * s.rate_hz;
  const double ratio = std::exp2(1.0 / 6.0);
  const auto density = [&](double centre) {
    return mean_density(s, centre / std::sqrt(ratio), centre * std::sqrt(ratio));
  };
  double hump_hz = 0.0;
  double hump = 0.0;
  for (double f = mounting_least_hz; f <= mounting_most_hz && 2.0 * f <= top; f *= std::sqrt(ratio)) {
    if (f * (ratio - 1.0) < 2.0 * s.line_hz) continue;
    const double here = median_density(s, f / std::sqrt(ratio), f * std::sqrt(ratio));
    if (here > hump) {
      hump = here;
      hump_hz = f;
    }
  }
  if (hump_hz == 0.0 || hump_hz <= mounting_least_hz) return std::nullopt;
  const double below = median_density(s, hump_hz / 5.0, hump_hz / 2.5);
  const double above = density(2.0 * hump_hz);
  if (hump < mounting_rise * below || hump < mounting_fall * above || above > mounting_lost * below)
    return std::nullopt;
  // Nothing above may come near it again: then it is one resonance among others.
  for (double f = 2.0 * hump_hz; f <= top; f *= ratio) {
    if (density(f) > mounting_lost * below) return std::nullopt;
  }
  return finding(
      Code::mounting_resonance, s, base::Strength::weak,
      fmt::format("the spectrum has a hump of {:.0f} dB near {:.0f} Hz and falls {:.0f} dB in the octave above "
                  "it; amplitudes are true to about 10 % below {:.0f} Hz only",
                  10.0 * std::log10(hump / below), hump_hz, 10.0 * std::log10(hump / above), 0.3 * hump_hz));
}

std::optional<Finding> noise_of_steps(const Spectrum& s, const recording::Channel& channel) {
  if (!channel.stored_step) return std::nullopt;
  // Rounding to steps q adds noise of mean square q^2 / 12, spread evenly to rate/2.
  const double of_steps = *channel.stored_step * *channel.stored_step / (6.0 * s.rate_hz);
  const double all = mean_square_above_zero(s);
  const double steps_rms = std::sqrt(0.5 * of_steps * s.rate_hz);
  if (all > 100.0 * steps_rms * steps_rms) return std::nullopt;  // 20 dB above the steps overall: good enough
  if (median_density(s, s.line_hz, 0.5 * s.rate_hz) > steps_above_noise * of_steps) return std::nullopt;
  return finding(Code::near_noise_floor, s, base::Strength::fair,
                 fmt::format("the signal is only {:.0f} dB above the noise of the recorder's own steps",
                             10.0 * std::log10(all / (steps_rms * steps_rms))));
}

}  // namespace

std::optional<double> slope_end_hz(const Spectrum& s) {
  if (s.blocks == 0 || s.quantity != base::Quantity::acceleration) return std::nullopt;
  const double start = least_low_limit_hz(s);
  const double top = 0.5 * s.rate_hz;
  // Octave by octave while the density falls faster than a machine's does; medians, so that one tone is no slope.
  double end = start;
  while (4.0 * end < top && median_density(s, end, 2.0 * end) > slope_fall * median_density(s, 2.0 * end, 4.0 * end)) {
    end *= 2.0;
  }
  if (end < 4.0 * start) return std::nullopt;
  // A steady tone among the lowest lines is a slow machine's, not a slope.
  const auto line = [&](double f) { return static_cast<std::size_t>(std::lround(f / s.line_hz)); };
  if (s.spread.size() > line(end)) {
    std::vector<double> spread(s.spread.begin() + static_cast<std::ptrdiff_t>(line(start)),
                               s.spread.begin() + static_cast<std::ptrdiff_t>(line(2.0 * start) + 1));
    if (numeric::median(std::move(spread)) < slope_spread) return std::nullopt;
  }
  const Spectrum velocity = as_quantity(s, base::Quantity::velocity);
  const double on_slope = band_rms(velocity, {start, end}).value;
  const double all = band_rms(velocity, {start, top}).value;
  if (on_slope * on_slope < slope_share * all * all) return std::nullopt;
  return end;
}

std::vector<Finding> spectral_findings(const Spectrum& spectrum, const recording::Channel& channel,
                                       std::optional<double> line_frequency_hz) {
  std::vector<Finding> findings;
  const bool is_usable =
      spectrum.blocks > 0 && spectrum.averaging != Averaging::peak_hold && spectrum.density.size() > 32;
  if (!is_usable || channel.role == recording::Role::tacho) return findings;
  const double all = mean_square_above_zero(spectrum);
  if (!(all > 0.0) || !std::isfinite(all)) return findings;
  const auto add = [&](std::optional<Finding> found) {
    if (found) findings.push_back(std::move(*found));
  };
  if (channel.role == recording::Role::vibration) {
    add(low_frequency_slope(spectrum));
    add(mains_hum(spectrum, line_frequency_hz));
    add(aliasing(spectrum));
    if (spectrum.quantity == base::Quantity::acceleration) add(mounting_resonance(spectrum));
  }
  add(noise_of_steps(spectrum, channel));
  const bool is_told = std::any_of(findings.begin(), findings.end(), [](const Finding& each) {
    return each.code == Code::near_noise_floor || each.code == Code::aliasing_suspected;
  });
  if (channel.role == recording::Role::vibration && !is_told) add(mere_noise(spectrum));
  return findings;
}

}  // namespace stillmass::spectral
