#pragma once

#include <functional>
#include <span>

#include "stillmass/absorber/minimax.hpp"

namespace stillmass::absorber {

/// A tuning and a damping ratio, and what they cost.
struct Tuned {
  double tuning = 0.0;
  double damping_ratio = 0.0;
  double cost = 0.0;
};

/// The tuning and damping of least cost near a start: a compass search in both logarithms, the steps (relative) halved
/// until below `resolution`. For costs with kinks, such as a quantile over cases. Damping stays >= least_damping.
Tuned least_cost(const std::function<double(double tuning, double damping_ratio)>& cost, Tuned start,
                 double tuning_step, double damping_step, double resolution, double least_damping);

/// A machine as it may turn out to be, in ratios to the machine the absorber is designed for.
struct MachineCase {
  double mass_ratio = 0.0;
  double machine_damping = 0.0;
  double frequency = 1.0;  ///< natural frequency of this case over the nominal one
};

/// One absorber for many machines: the tuning (to the nominal natural frequency) and damping with the least
/// `probability` quantile (0.95: all but 5 % of the cases stay below it) of the greatest response over all frequencies.
/// Heights are over F/k (constant) and so on, of each case. Not for random. `cost` of the answer is that quantile.
Tuned robust(std::span<const MachineCase> cases, Forcing forcing, Objective objective, double probability,
             const base::Context& context);

}  // namespace stillmass::absorber
