#pragma once

#include <limits>
#include <span>
#include <vector>

#include "stillmass/absorber/closed_forms.hpp"
#include "stillmass/base/context.hpp"

namespace stillmass::absorber {

/// What a sizing is asked for, in ratios.
struct SizingProblem {
  double mass_ratio = 0.0;       ///< absorber's mass over modal mass, 1e-4 to 2
  double machine_damping = 0.0;  ///< 0 to 0.3
  Forcing forcing = Forcing::constant;
  Objective objective = Objective::velocity;
  /// Forcing frequencies over the machine's; the maximum counts within it. Ignored for random. At an open end (0 or
  /// infinity) the resonance peaks alone count; where there are not two of them, frequencies from 0.4 to 1.6.
  base::Interval band{0.0, std::numeric_limits<double>::infinity()};
  double least_damping = 1e-3;  ///< what the absorber has at least
};

/// The absorber with the least maximum over the band (least mean square for random). Where the band holds both peaks
/// the answer is that of two equal peaks to 1e-9; otherwise it comes from a nested search to about 1e-5.
/// Throws `Error` (usage) for a problem outside its ranges.
Sizing minimax(const SizingProblem& problem);

/// One answer a problem, in their order, on context.threads threads.
std::vector<Sizing> minimax_each(std::span<const SizingProblem> problems, const base::Context& context);

/// The greatest response over the band (for random the mean square) of a given absorber, as `Sizing::height`.
double worst(const SizingProblem& problem, double tuning, double damping_ratio);

}  // namespace stillmass::absorber
