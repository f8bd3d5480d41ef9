#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/numeric/matrix.hpp"

namespace stillmass::numeric {

/// What the weights say of the observations.
enum class Weights {
  relative,  ///< only their ratios count: the covariance is scaled by residual_sum / dof
  absolute,  ///< each is 1 / u^2 of its observation: the covariance is (A^T W A)^-1
};

/// The x that minimises sum w_i (A x - y)_i^2.
struct LinearFit {
  std::vector<double> x;
  Matrix covariance;
  double residual_sum = 0.0;  ///< weighted sum of squares
  double dof = 0.0;           ///< observations less rank
  std::size_t rank = 0;       ///< fewer than the unknowns: x is the one of least norm
};

/// `weights` empty: all 1. Columns are scaled to length 1 before the decomposition, so units of the unknowns do not
/// matter. Throws `Error` (internal) for lengths that do not fit, fewer observations than unknowns, a negative weight
/// or anything not finite. With relative weights and dof 0 the covariance is left unscaled. Source: Golub & Van Loan,
/// Matrix Computations, ch. 5 (least squares by singular values).
LinearFit least_squares(const Matrix& design, std::span<const double> y, std::span<const double> weights = {},
                        Weights kind = Weights::relative);

/// The complex x that minimises sum w_i |A x - y|_i^2. `covariance` is of (Re x0, Im x0, Re x1, ...), `dof` counts real
/// numbers, and an absolute weight is 1 / u^2 of the real part as of the imaginary part.
struct ComplexLinearFit {
  std::vector<std::complex<double>> x;
  Matrix covariance;
  double residual_sum = 0.0;
  double dof = 0.0;
};

/// `design`: row by row, y.size() rows of `unknowns` entries.
ComplexLinearFit least_squares(std::span<const std::complex<double>> design, std::size_t unknowns,
                               std::span<const std::complex<double>> y, std::span<const double> weights = {},
                               Weights kind = Weights::relative);

}  // namespace stillmass::numeric
