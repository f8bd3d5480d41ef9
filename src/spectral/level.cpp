#include "stillmass/spectral/level.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/strong_lines.hpp"
#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

/// The frequencies for which line k stands.
base::Interval cell(const Spectrum& s, std::size_t k) {
  const double f = s.frequency(k);
  return {std::max(f - 0.5 * s.line_hz, 0.0), std::min(f + 0.5 * s.line_hz, 0.5 * s.rate_hz)};
}

double share(const base::Interval& cell, const base::Interval& band) {
  const double common = std::min(cell.hi, band.hi) - std::max(cell.lo, band.lo);
  return common > 0.0 ? common / cell.width() : 0.0;
}

/// Variance of the sum of these mean squares per line, each with the relative scatter of its blocks, neighbours
/// correlated as noise under the window is.
double variance(const Spectrum& s, std::size_t first, const std::vector<double>& mean_squares) {
  std::vector<double> deviation(mean_squares.size());
  for (std::size_t i = 0; i < deviation.size(); ++i) deviation[i] = mean_squares[i] * s.spread[first + i];
  double sum = 0.0;
  for (std::size_t m = 0; static_cast<double>(m) <= 2.0 * lobe_bins(s.window) && m < deviation.size(); ++m) {
    const double rho = line_correlation(s.window, m);
    double products = 0.0;
    for (std::size_t i = 0; i + m < deviation.size(); ++i) products += deviation[i] * deviation[i + m];
    sum += (m == 0 ? 1.0 : 2.0) * rho * rho * products;
  }
  return sum / s.effective_averages;
}

/// Integral of (2 pi f)^-2n over an interval of frequencies > 0.
double weight(int n, const base::Interval& f) {
  const int p = 1 - 2 * n;
  const double scale = std::pow(2.0 * std::numbers::pi, -2 * n);
  return scale * (std::pow(f.hi, p) - std::pow(f.lo, p)) / p;
}

/// How much of a tone belongs to a band: all within it, less and less within half a line outside.
double share_near(const base::Interval& band, double frequency_hz, double line_hz) {
  const double outside = std::max({band.lo - frequency_hz, frequency_hz - band.hi, 0.0});
  return std::max(1.0 - outside / (0.5 * line_hz), 0.0);
}
/// The same where a tone may count in one band alone.
double share_in(const base::Interval& band, double frequency_hz, double /*line_hz*/) {
  return frequency_hz >= band.lo && frequency_hz < band.hi ? 1.0 : 0.0;
}
using ToneShare = double (*)(const base::Interval& band, double frequency_hz, double line_hz);

/// What the strong lines of an integrated spectrum have more (or less) in the band than their lobes, line by line.
struct StrongLines {
  double mean_square = 0.0;
  double variance = 0.0;  ///< of it
};

/// `line_weights`: what a density of 1 on the lines from `first` on puts into the band.
StrongLines strong_lines_in(const Spectrum& s, const base::Interval& band, std::size_t first,
                            const std::vector<double>& line_weights, ToneShare share_of) {
  constexpr double skirt_lines = 8.0;  // beyond them the skirts of a lobe are nothing
  StrongLines sum;
  const double lowest = s.frequency(s.first_line);
  const base::Interval given{std::max(band.lo, lowest), band.hi};
  const double bins = s.noise_bandwidth_hz / s.line_hz;
  std::vector<double> shares;
  for (const StrongLine& line : s.strong_lines) {
    const double place = line.frequency_hz / s.line_hz;
    const bool far_skirts = has_far_skirts(s.window);
    const auto from = far_skirts || place < skirt_lines ? 0 : static_cast<std::size_t>(place - skirt_lines);
    const std::size_t begin = std::clamp(from, first, first + line_weights.size());
    const auto end = std::clamp(static_cast<std::size_t>(place + skirt_lines) + 1, begin, first + line_weights.size());
    shares.resize(end - begin);
    lobe_shares(s.window, bins, place, begin, shares);
    double on_lines = 0.0;
    double lost = 1.0;  // of the power: on lines that are not given
    for (std::size_t i = 0; i < shares.size(); ++i) {
      on_lines += shares[i] * line_weights[begin - first + i];
      lost -= shares[i];
    }
    if (far_skirts) {  // those of the mirrored tone too
      lobe_shares(s.window, bins, -place, begin, shares);
      for (std::size_t i = 0; i < shares.size(); ++i) on_lines += shares[i] * line_weights[begin - first + i];
    }
    const double at_tone = share_of(given, line.frequency_hz, s.line_hz) *
                           std::norm(integration_factor(s.integrations, line.frequency_hz));
    const double more = line.mean_square * (at_tone - on_lines / s.line_hz);
    sum.mean_square += more;
    // What the lines hold has its own scatter; beyond that the frequency counts, the power that is not on them, and how
    // far the lobe is that of one tone at all.
    const double by_frequency = -2.0 * s.integrations * line.u_hz / line.frequency_hz;
    const double by_power = std::max(lost, 0.0) * line.relative_u;
    const double relative =
        by_frequency * by_frequency + by_power * by_power + 2.0 * line.correlation * by_frequency * by_power;
    sum.variance += std::pow(line.mean_square * at_tone, 2) * relative + std::pow(line.mismatch * more, 2);
  }
  return sum;
}

base::Estimate level(const Spectrum& spectrum, const base::Interval& band_hz, ToneShare share_of) {
  const int n = spectrum.integrations;
  std::size_t first = 0;
  std::vector<double> mean_squares;
  std::vector<double> weights;  // of an integrated spectrum
  double sum = 0.0;
  for (std::size_t k = spectrum.first_line; k < spectrum.density.size(); ++k) {
    const base::Interval here = cell(spectrum, k);
    if (here.lo > band_hz.hi) break;
    const double part = share(here, band_hz);
    if (part == 0.0) continue;
    if (mean_squares.empty()) first = k;
    double mean_square = part * spectrum.density[k] * spectrum.line_hz;
    if (n != 0 && k > 0) {
      weights.push_back(weight(n, {std::max(here.lo, band_hz.lo), std::min(here.hi, band_hz.hi)}));
      mean_square = spectrum.density[k] / std::norm(integration_factor(n, spectrum.frequency(k))) * weights.back();
    }
    mean_squares.push_back(mean_square);
    sum += mean_square;
  }
  if (mean_squares.empty()) {
    throw base::usage_error({},
                            fmt::format("the spectrum has no line from {:.6g} to {:.6g} Hz", band_hz.lo, band_hz.hi),
                            fmt::format("it reaches from {:.6g} to {:.6g} Hz", spectrum.frequency(spectrum.first_line),
                                        0.5 * spectrum.rate_hz));
  }
  StrongLines strong;
  if (n != 0 && !weights.empty()) {
    const std::size_t first_weighed = first + mean_squares.size() - weights.size();
    strong = strong_lines_in(spectrum, band_hz, first_weighed, weights, share_of);
  }
  sum = std::max(sum + strong.mean_square, 0.0);
  base::Estimate rms{std::sqrt(sum), std::nullopt, std::nullopt, spectrum.quantity};
  if (!spectrum.spread.empty() && sum > 0.0) {
    rms.u = std::sqrt(variance(spectrum, first, mean_squares) + strong.variance) / (2.0 * rms.value);
    rms.dof = std::max(spectrum.effective_averages - 1.0, 1.0);
  }
  return rms;
}

}  // namespace

base::Estimate band_rms(const Spectrum& spectrum, base::Interval band_hz) {
  return level(spectrum, band_hz, share_near);
}

double nominal_third_octave_hz(int k) {
  constexpr std::array nominal{1.0, 1.25, 1.6, 2.0, 2.5, 3.15, 4.0, 5.0, 6.3, 8.0};
  const int decade = k >= 0 ? k / 10 : -((9 - k) / 10);
  // A power of ten below 1 is divided by, so that 31.5 and 0.8 are exactly what they are called.
  const double scale = std::pow(10.0, std::abs(decade + 3));
  const double mantissa = nominal[static_cast<std::size_t>(k - 10 * decade)];
  return decade + 3 >= 0 ? mantissa * scale : mantissa / scale;
}

ThirdOctaves third_octaves(const Spectrum& spectrum, base::Interval range_hz) {
  ThirdOctaves result;
  const double lowest = std::max(range_hz.lo, spectrum.frequency(spectrum.first_line));
  const double highest = std::min(range_hz.hi, 0.5 * spectrum.rate_hz);
  if (!(lowest < highest)) return result;
  // Without a lower limit the count begins with the first band wider than a line: below, bands have no end.
  const double from = lowest > 0.0 ? lowest : spectrum.line_hz;
  for (int k = static_cast<int>(std::floor(10.0 * std::log10(from / 1000.0)));; ++k) {
    const double centre = 1000.0 * std::pow(10.0, 0.1 * k);
    const double half = std::pow(10.0, 0.05);
    const base::Interval band{centre / half, centre * half};
    if (band.hi > highest) return result;
    if (band.lo < lowest) continue;
    if (band.width() < 2.0 * spectrum.noise_bandwidth_hz) {
      ++result.unresolved;
      continue;
    }
    const double nominal = nominal_third_octave_hz(k);
    if (result.bands.empty()) result.resolved_from_hz = nominal;
    result.bands.push_back({centre, nominal, band, level(spectrum, band, share_in)});
  }
}

}  // namespace stillmass::spectral
