#include "stillmass/spectral/noise_interval.hpp"

#include <cmath>

#include <fmt/format.h>

#include "stillmass/numeric/distribution.hpp"

#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

/// Density of the true spectrum over that measured, from and to.
base::Interval factors(double dof, double probability) {
  const double tail = 0.5 * (1.0 - probability);
  return {dof / numeric::chi_square_quantile(1.0 - tail, dof), dof / numeric::chi_square_quantile(tail, dof)};
}

}  // namespace

double degrees_of_freedom(const Spectrum& spectrum, std::size_t line) {
  // E|X|^4 = (2 + r^2) (E|X|^2)^2 for Gaussian X with E X^2 of magnitude r E|X|^2: r is the correlation with the mirror
  // image of the line, about 0 and about rate/2.
  const auto length = static_cast<std::size_t>(std::llround(spectrum.rate_hz / spectrum.line_hz));
  const double at_zero = line_correlation(spectrum.window, 2 * line);
  const double at_top = 2 * line <= length ? line_correlation(spectrum.window, length - 2 * line) : 0.0;
  return 2.0 * spectrum.effective_averages / (1.0 + at_zero * at_zero + at_top * at_top);
}

base::Answer<base::Interval> density_interval(const Spectrum& spectrum, std::size_t line, double probability) {
  if (spectrum.blocks == 0) {
    return base::Refusal{"no-blocks", "no block of valid samples", "record again without missing samples"};
  }
  if (spectrum.averaging == Averaging::peak_hold) {
    return base::Refusal{"peak-hold", "the greatest of the blocks grows with their number and estimates no density",
                         "average it instead"};
  }
  if (line < spectrum.first_line || line >= spectrum.density.size()) {
    return base::Refusal{"line-not-given", fmt::format("line {} is not given by the spectrum", line),
                         "take a line between its low limit and half the sampling rate"};
  }
  const base::Interval around = factors(degrees_of_freedom(spectrum, line), probability);
  return base::Interval{around.lo * spectrum.density[line], around.hi * spectrum.density[line]};
}

base::Answer<std::vector<base::Interval>> density_intervals(const Spectrum& spectrum, double probability) {
  const auto first = density_interval(spectrum, spectrum.first_line, probability);
  if (!first) return first.refusal();
  std::vector<base::Interval> all;
  double dof = 0.0;
  base::Interval around{0.0, 0.0};
  for (std::size_t k = spectrum.first_line; k < spectrum.density.size(); ++k) {
    const double here = degrees_of_freedom(spectrum, k);
    if (here != dof) around = factors(here, probability);  // the same on all lines but those near the ends
    dof = here;
    all.push_back({around.lo * spectrum.density[k], around.hi * spectrum.density[k]});
  }
  return all;
}

base::Answer<base::Interval> amplitude_interval(const Spectrum& spectrum, std::size_t line, double probability) {
  const auto density = density_interval(spectrum, line, probability);
  if (!density) return density.refusal();
  return base::Interval{std::sqrt(density->lo * spectrum.noise_bandwidth_hz),
                        std::sqrt(density->hi * spectrum.noise_bandwidth_hz)};
}

}  // namespace stillmass::spectral
