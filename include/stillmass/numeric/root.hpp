#pragma once

#include <functional>
#include <optional>

#include "stillmass/base/interval.hpp"

namespace stillmass::numeric {

/// Where a function of one variable changes its sign within the bracket, to `tolerance` in x (absolute, > 0). Brent's
/// method: superlinear on smooth functions, never slower than bisection by more than a constant factor.
/// Throws `Error` (internal) where the ends of the bracket have the same sign or a value is not a number.
/// Source: Brent, Algorithms for Minimization without Derivatives, 1973, ch. 4.
double bracketed_root(const std::function<double(double)>& f, base::Interval bracket, double tolerance);

struct Minimum {
  double at = 0.0;
  double value = 0.0;
};

/// A local minimum within the bracket, to `tolerance` in x (absolute; below about 1e-8 of x it gains nothing). Golden
/// section with parabolic steps; on a function with one minimum it finds that one, an end of the bracket included.
/// Source: Brent 1973, ch. 5.
Minimum minimum(const std::function<double(double)>& f, base::Interval bracket, double tolerance);

/// Two peak heights as functions of two parameters x and y, with their partial derivatives.
struct PeakPair {
  double first = 0.0, second = 0.0;
  double first_by_x = 0.0, first_by_y = 0.0;
  double second_by_x = 0.0, second_by_y = 0.0;
};

/// The parameters at which the higher of two peaks is least.
struct Minimax {
  double x = 0.0;
  double y = 0.0;
  double height = 0.0;
};

/// Least maximum of two peaks: Newton in x makes them equal (one rises with x, the other falls); along that curve the
/// derivative of the common height by y is
///   (first_y second_x - second_y first_x) / (second_x - first_x),
/// and its root is found in y within `y_bracket` by regula falsi (Illinois) with bisection as safeguard. `peaks` gives
/// nothing where there are not two peaks; then, and where the bracket holds no root or x does not settle within
/// `x_range`, the answer is nothing. `tolerance`: of x and y, relative.
std::optional<Minimax> minimax_of_two_peaks(const std::function<std::optional<PeakPair>(double x, double y)>& peaks,
                                            double x_start, base::Interval x_range, base::Interval y_bracket,
                                            double tolerance);

}  // namespace stillmass::numeric
