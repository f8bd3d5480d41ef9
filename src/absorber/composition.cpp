#include "absorber/composition.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/statistics.hpp"

namespace stillmass::absorber {
namespace {

constexpr double line_half_width = 4.5;  // lines of the spectrum that a steady tone may cover on either side
constexpr double neighbours = 10.0;      // lines beyond, from which the noise under the tone is read
constexpr std::size_t most_portions = 400;

void check(const base::Estimate& velocity, const char* what) {
  if (!(velocity.value > 0.0) || !std::isfinite(velocity.value)) {
    throw base::usage_error(what, "must be a positive velocity");
  }
}

/// Density of the noise under the forcing line: the median of its neighbours.
double density_beside(const VelocitySpectrum& spectrum, double line_hz) {
  std::vector<double> beside;
  for (std::size_t k = 0; k < spectrum.density.size(); ++k) {
    const double lines = std::abs(static_cast<double>(k) - line_hz / spectrum.line_hz);
    if (lines > line_half_width && lines <= line_half_width + neighbours) beside.push_back(spectrum.density[k]);
  }
  return beside.empty() ? 0.0 : numeric::median(std::move(beside));
}

/// Neighbouring portions joined until there are few enough, so that fine spectra cost no more than coarse ones.
std::vector<Portion> joined(const std::vector<Portion>& lines) {
  const std::size_t each = (lines.size() + most_portions - 1) / most_portions;
  std::vector<Portion> few;
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (i % std::max<std::size_t>(each, 1) == 0) few.push_back({});
    Portion& portion = few.back();
    const double sum = portion.mean_square + lines[i].mean_square;
    if (sum > 0.0) {
      portion.frequency_hz += (lines[i].frequency_hz - portion.frequency_hz) * lines[i].mean_square / sum;
    }
    portion.mean_square = sum;
  }
  std::erase_if(few, [](const Portion& portion) { return !(portion.mean_square > 0.0); });
  return few;
}

Composition from_spectrum(const Before& before, const ForcingRange& forcing, double natural_hz) {
  const VelocitySpectrum& spectrum = *before.spectrum;
  const auto sane = [](double density) { return std::isfinite(density) && density >= 0.0; };
  if (!(spectrum.line_hz > 0.0) || !std::all_of(spectrum.density.begin(), spectrum.density.end(), sane)) {
    throw base::usage_error("spectrum before", "needs a line spacing and densities that are not negative");
  }
  const bool has_line = forcing.forcing != Forcing::random;
  if (has_line && !before.band_hz.contains(forcing.duty())) {
    throw base::usage_error("forcing frequency", "lies outside the band of the broad-band velocity",
                            "give the band that belongs to this speed");
  }
  const double under_line = has_line ? density_beside(spectrum, forcing.duty()) : 0.0;
  Composition parts;
  std::vector<Portion> lines;
  for (std::size_t k = 1; k < spectrum.density.size(); ++k) {
    const double f = static_cast<double>(k) * spectrum.line_hz;
    if (!before.band_hz.contains(f)) continue;
    double density = spectrum.density[k];
    if (has_line && std::abs(f - forcing.duty()) <= line_half_width * spectrum.line_hz) {
      parts.line += std::max(0.0, density - under_line) * spectrum.line_hz;
      density = std::min(density, under_line);
    }
    const double mean_square = density * spectrum.line_hz;
    if (modelled_range.contains(f / natural_hz)) {
      lines.push_back({f, mean_square});
    } else {
      parts.outside += mean_square;
    }
  }
  if (has_line && before.component) parts.line = before.component->value * before.component->value;
  parts.noise = joined(lines);
  double sum = parts.line + parts.outside;
  for (const Portion& portion : parts.noise) sum += portion.mean_square;
  parts.overall = std::sqrt(sum);
  return parts;
}

}  // namespace

Composition compose(const Before& before, const ForcingRange& forcing, double natural_hz, double relative_u_unknown) {
  if (before.overall) check(*before.overall, "broad-band velocity before");
  if (before.component) check(*before.component, "forcing line before");
  Composition parts;
  if (before.spectrum) {
    parts = from_spectrum(before, forcing, natural_hz);
    if (before.overall) parts.overall = before.overall->value;
  } else if (before.overall || before.component) {
    const double component = before.component ? before.component->value : before.overall->value;
    parts.overall = before.overall ? before.overall->value : component;
    if (forcing.forcing == Forcing::random) {
      parts.white = parts.overall * parts.overall;
    } else {
      parts.line = component * component;
      parts.outside = std::max(0.0, parts.overall * parts.overall - parts.line);
    }
  } else {
    throw base::usage_error("velocity before", "is needed for a prediction");
  }
  const auto& leading = before.component ? before.component : before.overall;
  std::optional<double> relative;
  if (leading && leading->u) relative = *base::widened(leading->u, leading->dof) / leading->value;
  parts.relative_u = relative.value_or(relative_u_unknown);
  return parts;
}

}  // namespace stillmass::absorber
