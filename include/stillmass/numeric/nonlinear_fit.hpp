#pragma once

#include <cstddef>
#include <functional>
#include <span>
#include <string_view>
#include <vector>

#include "stillmass/numeric/matrix.hpp"

namespace stillmass::numeric {

/// The sum of squares to be made least. Residuals carry their weights: r_i = (model_i - observed_i) / u_i.
struct FitProblem {
  std::size_t residuals = 0;
  std::function<void(std::span<const double> parameters, std::span<double> residual)> residual;
  /// d residual_i / d parameter_j; empty: central differences.
  std::function<void(std::span<const double> parameters, Matrix& jacobian)> jacobian;
};

struct FitOptions {
  std::vector<double> lower;  ///< bounds, one a parameter; empty: none
  std::vector<double> upper;
  int max_iterations = 100;
  double tolerance = 1e-12;  ///< relative: of the fall of the sum of squares, and of the scaled step
  bool absolute = false;     ///< true: the residuals' u are known, the covariance is not scaled by residual_sum / dof
};

enum class StopReason {
  converged,       ///< neither the sum nor the parameters move any more
  no_descent,      ///< no step lowers the sum although it should: at the accuracy of the numbers
  too_many_steps,  ///< max_iterations reached; the result is not a minimum
};
std::string_view name(StopReason reason);

struct NonlinearFit {
  std::vector<double> parameters;
  Matrix covariance;  ///< zero row and column for a parameter held at a bound or without influence
  std::vector<bool> at_bound;
  double residual_sum = 0.0;
  double dof = 0.0;  ///< residuals less free parameters
  int iterations = 0;
  StopReason reason = StopReason::too_many_steps;

  /// Standard uncertainty of parameter i, from the covariance.
  double u(std::size_t i) const;
};

/// Levenberg-Marquardt with the columns of the Jacobian scaled to length 1; steps that cross a bound end on it, and a
/// parameter pressed against its bound is held there. Bounds narrow the start. Throws `Error` (internal) for lengths
/// that do not fit, lower > upper, fewer residuals than parameters, or residuals not finite at the start; steps to
/// where residuals are not finite are refused and shortened. Source: Marquardt, J. SIAM 11 (1963) 431; damping update
/// after Nielsen (1999), from memory.
NonlinearFit nonlinear_fit(const FitProblem& problem, std::vector<double> start, const FitOptions& options = {});

}  // namespace stillmass::numeric
