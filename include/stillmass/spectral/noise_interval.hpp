#pragma once

#include <cstddef>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

// Confidence intervals of single lines, as for Gaussian noise. Of a line that a steady tone makes they are too wide: a
// tone's amplitude carries its own, smaller u (tone.hpp).

/// Degrees of freedom of the density of line k: 2 n, n the effective averages; half of that at 0 and rate/2, where the
/// transform is real; a little less than 2 n on the lines whose lobe reaches over 0 or rate/2 (2 n / (1 + r^2), r the
/// correlation with the mirrored line). Source: Blackman & Tukey 1958; Bendat & Piersol ch. 8 (from memory).
double degrees_of_freedom(const Spectrum& spectrum, std::size_t line);

/// Interval that holds the true density of line k with that probability: nu G / chi2(nu), Gaussian noise whose density
/// is even over the line's lobe. Refused: `peak-hold` (the greatest of the blocks estimates no density), `no-blocks`,
/// `line-not-given` (below first_line, or beyond the last).
base::Answer<base::Interval> density_interval(const Spectrum& spectrum, std::size_t line, double probability = 0.95);

/// That of every line from `first_line` on, in their order. Refused as above.
base::Answer<std::vector<base::Interval>> density_intervals(const Spectrum& spectrum, double probability = 0.95);

/// The same of the r.m.s. amplitude that the line shows (sqrt of density times noise bandwidth).
base::Answer<base::Interval> amplitude_interval(const Spectrum& spectrum, std::size_t line, double probability = 0.95);

}  // namespace stillmass::spectral
