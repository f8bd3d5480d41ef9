#include "stillmass/spectral/level.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

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

}  // namespace

base::Estimate band_rms(const Spectrum& spectrum, base::Interval band_hz) {
  std::size_t first = 0;
  std::vector<double> mean_squares;
  double sum = 0.0;
  for (std::size_t k = spectrum.first_line; k < spectrum.density.size(); ++k) {
    const double part = share(cell(spectrum, k), band_hz);
    if (part == 0.0) continue;
    if (mean_squares.empty()) first = k;
    mean_squares.push_back(part * spectrum.density[k] * spectrum.line_hz);
    sum += mean_squares.back();
  }
  if (mean_squares.empty()) {
    throw base::usage_error({},
                            fmt::format("the spectrum has no line from {:.6g} to {:.6g} Hz", band_hz.lo, band_hz.hi),
                            fmt::format("it reaches from {:.6g} to {:.6g} Hz", spectrum.frequency(spectrum.first_line),
                                        0.5 * spectrum.rate_hz));
  }
  base::Estimate rms{std::sqrt(sum), std::nullopt, std::nullopt, spectrum.quantity};
  if (!spectrum.spread.empty() && sum > 0.0) {
    rms.u = std::sqrt(variance(spectrum, first, mean_squares)) / (2.0 * rms.value);
    rms.dof = std::max(spectrum.effective_averages - 1.0, 1.0);
  }
  return rms;
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
    result.bands.push_back({centre, nominal, band, band_rms(spectrum, band)});
  }
}

}  // namespace stillmass::spectral
