#pragma once

#include <optional>

#include "stillmass/base/interval.hpp"
#include "stillmass/base/unit.hpp"

namespace stillmass::base {

/// A value with its standard uncertainty (k = 1), in the SI unit of its quantity (JCGM 100). An uncertainty that is not
/// known is absent, never 0.
struct Estimate {
  double value = 0.0;
  std::optional<double> u;    ///< standard uncertainty
  std::optional<double> dof;  ///< degrees of freedom of u; absent: u is well known (infinitely many)
  Quantity quantity = Quantity::ratio;

  /// u / |value|; absent where u is, or where the value is 0.
  std::optional<double> relative() const;
  /// The 95 % interval: value +- t(0.975, dof) u. Absent where u is.
  std::optional<Interval> interval95() const;
};

/// Quantile of Student's t at 97.5 % for these degrees of freedom (>= 1; real numbers allowed); 1.96 for infinitely
/// many. Within 0.1 % of the table. Source: Cornish-Fisher expansion, Abramowitz & Stegun 26.7.5; exact for 1 and 2.
double student975(std::optional<double> dof);

/// u widened for few degrees of freedom, so that value +- 2 u holds about 95 %: u * t975(dof) / 1.96.
std::optional<double> widened(std::optional<double> u, std::optional<double> dof);

}  // namespace stillmass::base
