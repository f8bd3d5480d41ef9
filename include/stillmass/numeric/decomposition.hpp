#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/numeric/matrix.hpp"

namespace stillmass::numeric {

// The decompositions of small dense matrices that the program needs, each a function. All throw `base::Error`
// (internal) for shapes that do not fit or numbers that are not finite.

/// A = U diag(s) V^T, thin: U is m x k, V is n x k, k = min(m, n); s falling, not negative.
struct SingularValues {
  Matrix u;
  std::vector<double> s;
  Matrix v;
};
SingularValues singular_values(const Matrix& a);

/// The x of least norm that minimises |A x - b|, and (A^T A)^+. Singular values below `cutoff` times the largest count
/// as 0.
struct LeastNormSolution {
  std::vector<double> x;
  Matrix normal_inverse;
  std::size_t rank = 0;
  double condition = 0.0;  ///< largest over smallest singular value; infinite where A is short of rank
};
LeastNormSolution solve_least_norm(const Matrix& a, std::span<const double> b, double cutoff = 1e-12);

/// Of a symmetric positive definite A: A^-1. Empty where A is not positive definite. Only the lower half is read.
std::optional<Matrix> inverse_positive_definite(const Matrix& a);
/// The solution of A x = b for such an A.
std::optional<std::vector<double>> solve_positive_definite(const Matrix& a, std::span<const double> b);
/// The lower triangle L with A = L L^T.
std::optional<Matrix> cholesky(const Matrix& a);

/// Eigenvalues rising, eigenvector i in column i.
struct SymmetricEigen {
  std::vector<double> values;
  Matrix vectors;
};
/// Of a symmetric A; vectors of length 1. Only the lower half is read.
SymmetricEigen eigen_symmetric(const Matrix& a);
/// Of K x = lambda M x, K symmetric, M symmetric positive definite; vectors scaled to x^T M x = 1.
SymmetricEigen eigen_symmetric(const Matrix& k, const Matrix& m);

/// Eigenvalues of any real square matrix, in no particular order.
std::vector<std::complex<double>> eigenvalues(const Matrix& a);

/// The roots of c0 + c1 z + ... + cn z^n (leading zeros dropped), as eigenvalues of the companion matrix and one Newton
/// step each; in no particular order.
std::vector<std::complex<double>> polynomial_roots(std::span<const std::complex<double>> coefficients);

}  // namespace stillmass::numeric
