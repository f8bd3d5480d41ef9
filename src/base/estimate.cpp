#include "stillmass/base/estimate.hpp"

#include <array>
#include <cmath>

namespace stillmass::base {
namespace {

constexpr double normal975 = 1.959963984540054;

}  // namespace

std::optional<double> Estimate::relative() const {
  if (!u || value == 0.0) return {};
  return *u / std::abs(value);
}

std::optional<Interval> Estimate::interval95() const {
  if (!u) return {};
  const double half = student975(dof) * *u;
  return Interval{value - half, value + half};
}

double student975(std::optional<double> dof) {
  if (!dof || !(*dof < 1e6)) return normal975;
  // t at 97.5 % for few degrees of freedom, where the expansion is not exact enough (e.g. Abramowitz & Stegun 26.10).
  static constexpr std::array<double, 6> few = {12.706205, 4.302653, 3.182446, 2.776445, 2.570582, 2.446912};
  const double n = *dof < 1.0 ? 1.0 : *dof;
  if (n < 6.0) {
    // Between whole numbers 1/n is the variable in which t is nearly straight.
    const auto below = static_cast<std::size_t>(n);
    const double whole = static_cast<double>(below);
    const double fraction = (1.0 / whole - 1.0 / n) / (1.0 / whole - 1.0 / (whole + 1.0));
    return few[below - 1] + fraction * (few[below] - few[below - 1]);
  }
  const double z = normal975;
  const double g1 = (std::pow(z, 3) + z) / 4.0;
  const double g2 = (5.0 * std::pow(z, 5) + 16.0 * std::pow(z, 3) + 3.0 * z) / 96.0;
  const double g3 = (3.0 * std::pow(z, 7) + 19.0 * std::pow(z, 5) + 17.0 * std::pow(z, 3) - 15.0 * z) / 384.0;
  return z + g1 / n + g2 / (n * n) + g3 / (n * n * n);
}

std::optional<double> widened(std::optional<double> u, std::optional<double> dof) {
  if (!u) return {};
  return *u * student975(dof) / normal975;
}

}  // namespace stillmass::base
