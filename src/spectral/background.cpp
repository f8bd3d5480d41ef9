#include "stillmass/spectral/background.hpp"

#include <algorithm>
#include <cmath>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/level.hpp"

namespace stillmass::spectral {

namespace {

constexpr double coverage = 2.0;  // standard uncertainties that tell a machine from its background

void check_quantities(const Spectrum& running, const Spectrum& background) {
  if (running.quantity == background.quantity) return;
  throw base::usage_error({},
                          fmt::format("a background in {} of a spectrum in {}", base::name(background.quantity),
                                      base::name(running.quantity)),
                          "bring both to one quantity");
}

void check_lines(const Spectrum& running, const Spectrum& background) {
  check_quantities(running, background);
  if (running.averaging != Averaging::mean || background.averaging != Averaging::mean) {
    throw base::usage_error({}, "a background taken off a peak hold", "average both spectra");
  }
  if (running.blocks == 0 || background.blocks == 0) {
    throw base::usage_error({}, "a background taken off without lines", "both spectra need a valid block");
  }
  const bool same_lines = std::abs(running.line_hz - background.line_hz) <= 1e-9 * running.line_hz;
  if (!same_lines || running.window != background.window) {
    throw base::usage_error(
        {},
        fmt::format("a background with lines {:.6g} Hz apart ({}) against {:.6g} Hz ({})", background.line_hz,
                    name(background.window), running.line_hz, name(running.window)),
        "give both spectra the same resolution and window, or compare bands");
  }
}

/// Standard uncertainty of the density of line k; absent for a single block.
std::optional<double> density_u(const Spectrum& s, std::size_t k) {
  if (s.spread.empty()) return std::nullopt;
  return s.density[k] * s.spread[k] / std::sqrt(s.effective_averages);
}

/// Welch & Satterthwaite: degrees of freedom of the sum of two variances, each with its own.
std::optional<double> combined_dof(double u1, std::optional<double> dof1, double u2, std::optional<double> dof2) {
  const auto term = [](double u, std::optional<double> dof) { return dof ? std::pow(u, 4) / *dof : 0.0; };
  const double sum = term(u1, dof1) + term(u2, dof2);
  if (!(sum > 0.0)) return std::nullopt;
  return std::pow(u1 * u1 + u2 * u2, 2) / sum;
}

base::Estimate share_of(const base::Estimate& background, const base::Estimate& running) {
  base::Estimate share;
  share.value = running.value > 0.0 ? background.value / running.value : 0.0;
  if (background.u && running.u && running.value > 0.0) {
    const double first = *background.u / running.value;
    const double second = share.value * *running.u / running.value;
    share.u = std::hypot(first, second);
    share.dof = combined_dof(first, background.dof, second, running.dof);
  }
  return share;
}

base::Refusal covers(const BackgroundLevel& level) {
  const base::Unit unit = base::trade_unit(level.running.quantity);
  return {
      "background-covers-machine",
      fmt::format("from {:.4g} to {:.4g} Hz the background ({:.3g} {} r.m.s.) is not clearly below the running level "
                  "({:.3g} {})",
                  level.band_hz.lo, level.band_hz.hi, level.background.value / unit.to_si, unit.name,
                  level.running.value / unit.to_si, unit.name),
      "stop the neighbours and measure again, or record both states longer"};
}

}  // namespace

BackgroundLevel without_background(const Spectrum& running, const Spectrum& background, base::Interval band_hz) {
  check_quantities(running, background);
  BackgroundLevel level{.band_hz = band_hz,
                        .running = band_rms(running, band_hz),
                        .background = band_rms(background, band_hz),
                        .share = {},
                        .is_doubtful = false,
                        .machine = base::Refusal{}};
  const auto& [r, b] = std::pair(level.running, level.background);
  level.share = share_of(b, r);
  level.is_doubtful = b.value > doubtful_background_share * r.value;
  const double power = r.value * r.value - b.value * b.value;
  // u(power) = 2 sqrt((r u_r)^2 + (b u_b)^2); u(root) = u(power) / (2 root).
  std::optional<double> half_u;
  if (r.u && b.u) half_u = std::hypot(r.value * *r.u, b.value * *b.u);
  if (!(power > 0.0) || power < coverage * 2.0 * half_u.value_or(0.0)) {
    level.machine = covers(level);
    return level;
  }
  base::Estimate machine{std::sqrt(power), std::nullopt, std::nullopt, running.quantity};
  if (half_u) {
    machine.u = *half_u / machine.value;
    machine.dof = combined_dof(r.value * *r.u, r.dof, b.value * *b.u, b.dof);
  }
  level.machine = machine;
  return level;
}

DifferenceSpectrum line_difference(const Spectrum& running, const Spectrum& background) {
  check_lines(running, background);
  DifferenceSpectrum result;
  Spectrum& s = result.spectrum;
  s = running;
  const std::size_t lines = std::min(running.density.size(), background.density.size());
  s.first_line = std::min(std::max(running.first_line, background.first_line), lines);
  s.density.resize(lines);
  if (lines < running.density.size()) s.rate_hz = 2.0 * static_cast<double>(lines - 1) * s.line_hz;
  result.u.resize(lines);
  result.is_covered.resize(lines, 0);
  const bool has_u = !running.spread.empty() && !background.spread.empty();
  s.spread.assign(has_u ? lines : 0, 0.0);
  for (std::size_t k = 0; k < lines; ++k) {
    if (k < s.first_line) {
      s.density[k] = 0.0;
      continue;
    }
    const double difference = running.density[k] - background.density[k];
    if (has_u) result.u[k] = std::hypot(*density_u(running, k), *density_u(background, k));
    s.density[k] = std::max(difference, 0.0);
    if (has_u && difference > 0.0) s.spread[k] = *result.u[k] / difference * std::sqrt(s.effective_averages);
    if (!(difference > coverage * result.u[k].value_or(0.0))) {
      result.is_covered[k] = 1;
      ++result.covered;
    }
  }
  return result;
}

std::vector<BackgroundTone> background_tones(std::span<const Tone> running, std::span<const Tone> background,
                                             double line_hz, const BackgroundToneOptions& options) {
  std::vector<BackgroundTone> all;
  for (std::size_t i = 0; i < running.size(); ++i) {
    const Tone& tone = running[i];
    std::optional<std::size_t> partner;
    for (std::size_t j = 0; j < background.size(); ++j) {
      const Tone& other = background[j];
      const double u = std::hypot(tone.frequency.u.value_or(0.0), other.frequency.u.value_or(0.0));
      const double tolerance = std::max({options.tolerance_hz, 0.5 * line_hz, coverage * u});
      if (std::abs(tone.frequency.value - other.frequency.value) > tolerance) continue;
      if (!partner || other.amplitude_rms.value > background[*partner].amplitude_rms.value) partner = j;
    }
    if (!partner) continue;
    const base::Estimate& mine = tone.amplitude_rms;
    const base::Estimate& theirs = background[*partner].amplitude_rms;
    BackgroundTone found{.running = i, .background = *partner, .share = share_of(theirs, mine), .alone_rms = {}};
    found.is_marked = found.share.value >= options.least_share;
    found.alone_rms = {std::abs(mine.value - theirs.value), mine.value + theirs.value};
    all.push_back(found);
  }
  return all;
}

}  // namespace stillmass::spectral
