#pragma once

#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"

namespace stillmass::modal {

/// Modal mass of a driving point from the height of its accelerance at resonance, |A| = 1 / (2 z m), for one lightly
/// damped mode far from others; (m/s2)/N. Uncertainties propagate to first order, taken for independent.
base::Estimate mass_from_peak(const base::Estimate& accelerance, const base::Estimate& damping_ratio);

/// One bump test with a known mass bolted on.
struct AddedMass {
  base::Estimate mass;       ///< kg
  base::Estimate frequency;  ///< Hz, natural frequency with it
};

/// Modal mass from the fall of a natural frequency under an added mass: m = dm / ((f0 / f1)^2 - 1), for one mode that
/// moves along one axis. (A mass feels all three directions: then the result is 1 / (phi_x^2 + phi_y^2 + phi_z^2).)
/// Several masses: the mean of least variance (the tests share f0, which is taken into account), widened where they
/// scatter more than their uncertainties allow. Refuses `no-shift` where the frequency did not fall by more than twice
/// its uncertainty.
base::Answer<base::Estimate> mass_from_added_mass(const base::Estimate& frequency_without,
                                                  std::span<const AddedMass> tests);

}  // namespace stillmass::modal
