// The only file with Eigen's decompositions: they cost far more to compile than everything else together.
#include "stillmass/numeric/decomposition.hpp"

#include <Eigen/Cholesky>
#include <Eigen/Eigenvalues>
#include <Eigen/SVD>
#include <algorithm>
#include <cmath>
#include <limits>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

using RowMajor = Eigen::Matrix<double, Eigen::Dynamic, Eigen::Dynamic, Eigen::RowMajor>;

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "numeric/decomposition", what);
}

Eigen::Map<const RowMajor> mapped(const Matrix& a) {
  require(std::ranges::all_of(a.values(), [](double x) { return std::isfinite(x); }), "a number is not finite");
  return {a.values().data(), static_cast<Eigen::Index>(a.rows()), static_cast<Eigen::Index>(a.columns())};
}

template <class Derived>
Matrix unmapped(const Eigen::MatrixBase<Derived>& a) {
  Matrix result(static_cast<std::size_t>(a.rows()), static_cast<std::size_t>(a.cols()));
  Eigen::Map<RowMajor>(result.values().data(), a.rows(), a.cols()) = a;
  return result;
}

Eigen::VectorXd vector(std::span<const double> x) {
  return Eigen::Map<const Eigen::VectorXd>(x.data(), static_cast<Eigen::Index>(x.size()));
}

template <class Derived>
std::vector<typename Derived::Scalar> unpacked(const Eigen::MatrixBase<Derived>& x) {
  std::vector<typename Derived::Scalar> result(static_cast<std::size_t>(x.size()));
  for (std::size_t i = 0; i < result.size(); ++i) result[i] = x(static_cast<Eigen::Index>(i));
  return result;
}

std::optional<Eigen::LLT<Eigen::MatrixXd>> factored(const Matrix& a) {
  require(a.rows() == a.columns() && a.rows() > 0, "the matrix is not square");
  Eigen::LLT<Eigen::MatrixXd> factor(mapped(a));
  if (factor.info() != Eigen::Success) return std::nullopt;
  return factor;
}

}  // namespace

SingularValues singular_values(const Matrix& a) {
  require(a.rows() > 0 && a.columns() > 0, "an empty matrix has no singular values");
  const Eigen::BDCSVD<Eigen::MatrixXd> svd(mapped(a), Eigen::ComputeThinU | Eigen::ComputeThinV);
  return {unmapped(svd.matrixU()), unpacked(svd.singularValues()), unmapped(svd.matrixV())};
}

LeastNormSolution solve_least_norm(const Matrix& a, std::span<const double> b, double cutoff) {
  require(b.size() == a.rows(), "the right-hand side does not fit");
  const SingularValues svd = singular_values(a);
  const std::size_t n = a.columns();
  LeastNormSolution solution{std::vector<double>(n, 0.0), Matrix(n, n), 0, 0.0};
  const double largest = svd.s.front();
  const double smallest = n <= a.rows() ? svd.s.back() : 0.0;
  for (std::size_t k = 0; k < svd.s.size() && svd.s[k] > cutoff * largest; ++k) {
    ++solution.rank;
    double share = 0.0;
    for (std::size_t i = 0; i < a.rows(); ++i) share += svd.u(i, k) * b[i];
    for (std::size_t i = 0; i < n; ++i) {
      solution.x[i] += svd.v(i, k) * share / svd.s[k];
      for (std::size_t j = 0; j < n; ++j) {
        solution.normal_inverse(i, j) += svd.v(i, k) * svd.v(j, k) / (svd.s[k] * svd.s[k]);
      }
    }
  }
  solution.condition = solution.rank == n ? largest / smallest : std::numeric_limits<double>::infinity();
  return solution;
}

std::optional<Matrix> inverse_positive_definite(const Matrix& a) {
  const auto factor = factored(a);
  if (!factor) return std::nullopt;
  const auto n = static_cast<Eigen::Index>(a.rows());
  return unmapped(factor->solve(Eigen::MatrixXd::Identity(n, n)));
}

std::optional<std::vector<double>> solve_positive_definite(const Matrix& a, std::span<const double> b) {
  require(b.size() == a.rows(), "the right-hand side does not fit");
  const auto factor = factored(a);
  if (!factor) return std::nullopt;
  return unpacked(factor->solve(vector(b)));
}

std::optional<Matrix> cholesky(const Matrix& a) {
  const auto factor = factored(a);
  if (!factor) return std::nullopt;
  return unmapped(Eigen::MatrixXd(factor->matrixL()));
}

SymmetricEigen eigen_symmetric(const Matrix& a) {
  require(a.rows() == a.columns() && a.rows() > 0, "the matrix is not square");
  const Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd> solver(mapped(a));
  require(solver.info() == Eigen::Success, "the eigenvalues did not converge");
  return {unpacked(solver.eigenvalues()), unmapped(solver.eigenvectors())};
}

SymmetricEigen eigen_symmetric(const Matrix& k, const Matrix& m) {
  require(k.rows() == k.columns() && m.rows() == m.columns() && k.rows() == m.rows() && k.rows() > 0,
          "the matrices are not square and alike");
  require(factored(m).has_value(), "the second matrix is not positive definite");
  const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> solver(mapped(k), mapped(m));
  require(solver.info() == Eigen::Success, "the eigenvalues did not converge");
  return {unpacked(solver.eigenvalues()), unmapped(solver.eigenvectors())};
}

std::vector<std::complex<double>> eigenvalues(const Matrix& a) {
  require(a.rows() == a.columns() && a.rows() > 0, "the matrix is not square");
  const Eigen::EigenSolver<Eigen::MatrixXd> solver(mapped(a), false);
  require(solver.info() == Eigen::Success, "the eigenvalues did not converge");
  return unpacked(solver.eigenvalues());
}

std::vector<std::complex<double>> polynomial_roots(std::span<const std::complex<double>> coefficients) {
  std::size_t degree = coefficients.size();
  while (degree > 0 && coefficients[degree - 1] == 0.0) --degree;
  require(degree > 0, "the zero polynomial has every number for a root");
  if (--degree == 0) return {};

  const auto n = static_cast<Eigen::Index>(degree);
  Eigen::MatrixXcd companion = Eigen::MatrixXcd::Zero(n, n);
  for (Eigen::Index i = 0; i < n; ++i) {
    if (i + 1 < n) companion(i + 1, i) = 1.0;
    companion(i, n - 1) = -coefficients[static_cast<std::size_t>(i)] / coefficients[degree];
  }
  require(companion.allFinite(), "a number is not finite");
  const Eigen::ComplexEigenSolver<Eigen::MatrixXcd> solver(companion, false);
  require(solver.info() == Eigen::Success, "the eigenvalues did not converge");

  std::vector<std::complex<double>> roots = unpacked(solver.eigenvalues());
  for (auto& root : roots) {
    std::complex<double> value = coefficients[degree];
    std::complex<double> slope = 0.0;
    for (std::size_t i = degree; i-- > 0;) {
      slope = slope * root + value;
      value = value * root + coefficients[i];
    }
    const std::complex<double> step = value / slope;
    if (std::abs(step) < 1e-3 * (1.0 + std::abs(root))) root -= step;
  }
  return roots;
}

}  // namespace stillmass::numeric
