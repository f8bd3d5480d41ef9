#include "stillmass/modal/modal_mass.hpp"

#include <cmath>
#include <optional>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/numeric/decomposition.hpp"
#include "stillmass/numeric/statistics.hpp"

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

base::Estimate plain_mean(std::span<const Single> singles) {
  numeric::RunningMoments moments;
  for (const Single& one : singles) moments.add(one.mass);
  base::Estimate result{moments.mean(), {}, {}, base::Quantity::mass};
  if (const auto deviation = moments.standard_deviation()) {
    result.u = *deviation / std::sqrt(static_cast<double>(singles.size()));
    result.dof = static_cast<double>(singles.size()) - 1.0;
  }
  return result;
}

/// The mean of least variance; the frequency without a mass is common to all tests. A scatter beyond what the
/// uncertainties allow widens it. Nothing where an uncertainty is 0.
std::optional<base::Estimate> generalised_mean(const base::Estimate& frequency_without,
                                               std::span<const AddedMass> tests, std::span<const Single> singles) {
  const std::size_t n = singles.size();
  numeric::Matrix covariance(n, n);
  for (std::size_t i = 0; i < n; ++i) {
    for (std::size_t j = 0; j < n; ++j) {
      covariance(i, j) = singles[i].by_without * singles[j].by_without * square(*frequency_without.u);
    }
    covariance(i, i) += square(singles[i].by_with * *tests[i].frequency.u) +
                        square(singles[i].by_added * tests[i].mass.u.value_or(0.0));
  }
  const auto inverse = numeric::inverse_positive_definite(covariance);
  if (!inverse) return std::nullopt;
  double weight = 0.0;
  double sum = 0.0;
  double squares = 0.0;
  for (std::size_t i = 0; i < n; ++i) {
    for (std::size_t j = 0; j < n; ++j) {
      weight += (*inverse)(i, j);
      sum += (*inverse)(i, j) * singles[j].mass;
      squares += (*inverse)(i, j) * singles[i].mass * singles[j].mass;
    }
  }
  base::Estimate result{sum / weight, std::sqrt(1.0 / weight), {}, base::Quantity::mass};
  const double dof = static_cast<double>(n) - 1.0;
  const double chi_square = squares - sum * sum / weight;
  if (dof > 0.0 && chi_square > dof) {
    *result.u *= std::sqrt(chi_square / dof);
    result.dof = dof;
  }
  return result;
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

  std::vector<Single> singles;
  for (const AddedMass& test : tests) singles.push_back(single(f0, test));
  const auto combined = known ? generalised_mean(frequency_without, tests, singles) : std::nullopt;
  return combined ? *combined : plain_mean(singles);
}

}  // namespace stillmass::modal
