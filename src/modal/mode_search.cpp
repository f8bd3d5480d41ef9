#include "modal/mode_search.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;

constexpr double model_error = 0.002;
constexpr double least_significance = 6.0;
constexpr double least_damping = 1e-5;
constexpr double largest_damping = 0.3;
constexpr std::size_t most_added = 3;
constexpr double misfit_that_counts = 9.0;  // mean square, in units of the lines' variance
constexpr double gain_that_counts = 0.7;    // of chi-square after over before
constexpr std::size_t misfit_reach = 5;     // lines to either side

std::vector<FrequencyAndDamping> systems(const CurveFit& fit) {
  std::vector<FrequencyAndDamping> start;
  for (const FittedMode& mode : fit.modes) start.push_back(mode.system);
  return start;
}

bool supported(const FittedMode& mode, base::Interval band_hz, double sign) {
  const double z = mode.system.damping_ratio;
  if (!mode.settled || !band_hz.contains(mode.system.frequency_hz) || z < least_damping || z > largest_damping)
    return false;
  if (sign * mode.strength.front().real() < 0.0) return false;
  for (std::size_t p = 0; p < mode.strength.size(); ++p) {
    if (std::abs(mode.strength[p]) > least_significance * mode.strength_u[p]) return true;
  }
  return false;
}

/// The line about which the fit misses most, and the mean square of its misfit there.
struct Misfit {
  std::size_t line = 0;
  double mean_square = 0.0;
};

Misfit worst_misfit(const CurveFit& fit, const FitLines& lines) {
  const std::size_t n = lines.frequency_hz.size();
  std::vector<double> sums(n + 1, 0.0);
  for (std::size_t k = 0; k < n; ++k) {
    const Complex s(lines.decay_per_s, 2.0 * std::numbers::pi * lines.frequency_hz[k]);
    double square = 0.0;
    for (std::size_t p = 0; p < lines.accelerance.size(); ++p) {
      square += 0.5 * std::norm((fit.accelerance(p, s) - lines.accelerance[p][k]) / lines.u[p][k]);
    }
    sums[k + 1] = sums[k] + square / static_cast<double>(lines.accelerance.size());
  }
  Misfit worst;
  constexpr std::size_t span = 2 * misfit_reach + 1;
  for (std::size_t k = 0; k + span <= n; ++k) {
    const double mean = (sums[k + span] - sums[k]) / static_cast<double>(span);
    if (mean > worst.mean_square) worst = {k + misfit_reach, mean};
  }
  return worst;
}

base::Answer<CurveFit> fitted(const FitLines& lines, std::span<const FrequencyAndDamping> start) {
  return curve_fit(lines.frequency_hz, lines.measured(), start, lines.decay_per_s);
}

/// Fits, and fits again without the modes that the data do not support; `one_way`: all must move as the most of them.
base::Answer<CurveFit> pruned(const FitLines& lines, std::vector<FrequencyAndDamping> start, base::Interval band_hz,
                              bool one_way) {
  base::Answer<CurveFit> fit = fitted(lines, start);
  while (fit) {
    const double sign = one_way ? driving_sign(*fit) : 0.0;
    std::vector<FrequencyAndDamping> kept;
    for (const FittedMode& mode : fit->modes) {
      if (supported(mode, band_hz, sign)) kept.push_back(mode.system);
    }
    if (kept.size() == fit->modes.size()) return fit;
    if (kept.empty()) break;
    fit = fitted(lines, kept);
  }
  if (!fit) return fit;
  return base::Refusal{"no-mode", "no resonance stands out of the scatter between the blows",
                       "strike harder, with more blows, at a point that moves more"};
}

}  // namespace

std::vector<MeasuredResponse> FitLines::measured() const {
  std::vector<MeasuredResponse> responses;
  for (std::size_t p = 0; p < accelerance.size(); ++p) responses.push_back({accelerance[p], u[p]});
  return responses;
}

FitLines fit_lines(const HitSpectra& spectra, std::span<const Average> averages, base::Interval band_hz) {
  FitLines lines;
  lines.decay_per_s = spectra.decay_per_s;
  lines.accelerance.resize(averages.size());
  lines.u.resize(averages.size());
  for (std::size_t k = HitSpectra::padding; k < spectra.lines(); k += HitSpectra::padding) {
    const double f = static_cast<double>(k) * spectra.line_hz;
    if (!band_hz.contains(f)) continue;
    lines.frequency_hz.push_back(f);
    for (std::size_t p = 0; p < averages.size(); ++p) {
      const Complex a = averages[p].accelerance[k];
      lines.accelerance[p].push_back(a);
      lines.u[p].push_back(std::max(1e-300, std::hypot(averages[p].u[k], model_error * std::abs(a))));
    }
  }
  return lines;
}

FitLines with_accelerances(FitLines lines, const HitSpectra& spectra,
                           std::span<const std::vector<Complex>> accelerances) {
  for (std::size_t p = 0; p < accelerances.size(); ++p) {
    for (std::size_t i = 0; i < lines.frequency_hz.size(); ++i) {
      const auto k = static_cast<std::size_t>(std::llround(lines.frequency_hz[i] / spectra.line_hz));
      lines.accelerance[p][i] = accelerances[p][k];
    }
  }
  return lines;
}

PeakLines peak_lines(const HitSpectra& spectra, std::span<const Average> averages) {
  PeakLines lines;
  lines.line_hz = spectra.line_hz;
  const double share = 1.0 / static_cast<double>(averages.size());
  for (std::size_t k = 0; k < spectra.lines(); ++k) {
    double square = 0.0;
    double variance = 0.0;
    double coherence = 0.0;
    for (const Average& average : averages) {
      const double imaginary = average.accelerance[k].imag();
      square += imaginary * imaginary;
      variance += average.u[k] * average.u[k];
      if (!average.coherence.empty()) coherence += share * average.coherence[k];
    }
    lines.indicator.push_back(std::sqrt(square));
    lines.u.push_back(std::sqrt(variance));
    if (!averages.front().coherence.empty()) lines.coherence.push_back(coherence);
  }
  return lines;
}

double driving_sign(const CurveFit& fit) {
  double sum = 0.0;
  for (const FittedMode& mode : fit.modes) sum += mode.strength.front().real() / (mode.system.damping_ratio + 1e-9);
  return sum >= 0.0 ? 1.0 : -1.0;
}

base::Answer<CurveFit> search_modes(const FitLines& lines, std::vector<FrequencyAndDamping> start,
                                    base::Interval band_hz, bool driving_point_first) {
  base::Answer<CurveFit> best = pruned(lines, std::move(start), band_hz, false);
  for (std::size_t added = 0; best && added < most_added; ++added) {
    const Misfit misfit = worst_misfit(*best, lines);
    if (misfit.mean_square < misfit_that_counts) break;
    std::vector<FrequencyAndDamping> more = systems(*best);
    more.push_back({lines.frequency_hz[misfit.line], 0.02});
    base::Answer<CurveFit> next = pruned(lines, std::move(more), band_hz, driving_point_first);
    const bool better = next && next->modes.size() > best->modes.size() &&
                        next->chi_square_per_dof < gain_that_counts * best->chi_square_per_dof;
    if (!better) break;
    best = std::move(next);
  }
  return best;
}

}  // namespace stillmass::modal
