#include "stillmass/modal/modal_mass.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::modal {
namespace {

double square(double x) { return x * x; }

/// The mass one test says, and its slopes in the two frequencies and in the added mass.
struct Single {
  double mass;
  double by_without;
  double by_with;
  double by_added;
};

Single single(double f0, const AddedMass& test) {
  const double f1 = test.frequency.value;
  const double shift = square(f0 / f1) - 1.0;
  const double mass = test.mass.value / shift;
  const double slope = -2.0 * mass / shift * square(f0 / f1);
  return {mass, slope / f0, -slope / f1, 1.0 / shift};
}

}  // namespace

base::Estimate mass_from_peak(const base::Estimate& accelerance, const base::Estimate& damping_ratio) {
  base::Estimate mass{0.5 / (accelerance.value * damping_ratio.value), {}, {}, base::Quantity::mass};
  const auto height = accelerance.relative();
  const auto damping = damping_ratio.relative();
  if (!height || !damping) return mass;
  const double relative = std::hypot(*height, *damping);
  mass.u = mass.value * relative;
  double inverse_dof = 0.0;
  if (accelerance.dof) inverse_dof += std::pow(*height / relative, 4) / *accelerance.dof;
  if (damping_ratio.dof) inverse_dof += std::pow(*damping / relative, 4) / *damping_ratio.dof;
  if (inverse_dof > 0.0) mass.dof = 1.0 / inverse_dof;
  return mass;
}

base::Answer<base::Estimate> mass_from_added_mass(const base::Estimate& frequency_without,
                                                  std::span<const AddedMass> tests) {
  if (tests.empty()) throw base::Error(base::ErrorKind::internal, "modal/modal_mass", "there is no test with a mass");
  const double f0 = frequency_without.value;
  bool known = frequency_without.u.has_value();
  for (const AddedMass& test : tests) {
    known = known && test.frequency.u.has_value();
    const double shift = f0 - test.frequency.value;
    const double u = std::hypot(frequency_without.u.value_or(0.0), test.frequency.u.value_or(0.0));
    if (shift > 2.0 * u && shift > 0.0) continue;
    return base::Refusal{"no-shift",
                         "with " + base::rounded(test.mass.value) + " kg added the natural frequency went from " +
                             base::rounded(f0, 5) + " to " + base::rounded(test.frequency.value, 5) +
                             " Hz, which is no fall beyond the uncertainty",
                         "bolt on a heavier mass at the same point, until the frequency falls by at least 2 %"};
  }

  // What is independent in each test weighs it; f0 is common to all.
  double weight_sum = 0.0;
  double mean = 0.0;
  double common = 0.0;
  std::vector<double> masses;
  std::vector<double> weights;
  for (const AddedMass& test : tests) {
    const Single one = single(f0, test);
    const double own =
        std::hypot(one.by_with * test.frequency.u.value_or(0.0), one.by_added * test.mass.u.value_or(0.0));
    const double weight = known && own > 0.0 ? 1.0 / square(own) : 1.0;
    weight_sum += weight;
    mean += weight * one.mass;
    common += weight * one.by_without * frequency_without.u.value_or(0.0);
    masses.push_back(one.mass);
    weights.push_back(weight);
  }
  mean /= weight_sum;
  common /= weight_sum;
  base::Estimate result{mean, {}, {}, base::Quantity::mass};

  double scatter = 0.0;
  for (std::size_t i = 0; i < masses.size(); ++i) scatter += weights[i] * square(masses[i] - mean);
  const double n = static_cast<double>(masses.size());
  const double scatter_square = n > 1.0 ? scatter / (weight_sum * (n - 1.0)) : 0.0;
  if (known) {
    const double own_square = 1.0 / weight_sum;
    result.u = std::sqrt(square(common) + std::max(own_square, scatter_square));
    if (scatter_square > own_square) result.dof = n - 1.0;
  } else if (n > 1.0) {
    result.u = std::sqrt(scatter_square);
    result.dof = n - 1.0;
  }
  return result;
}

}  // namespace stillmass::modal
