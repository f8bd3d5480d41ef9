#include "stillmass/numeric/least_squares.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/decomposition.hpp"

namespace stillmass::numeric {
namespace {

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "numeric/least_squares", what);
}

bool finite(std::span<const double> values) {
  return std::ranges::all_of(values, [](double x) { return std::isfinite(x); });
}

std::vector<double> scale_columns(Matrix& a) {
  std::vector<double> length(a.columns(), 0.0);
  for (std::size_t r = 0; r < a.rows(); ++r) {
    for (std::size_t c = 0; c < a.columns(); ++c) length[c] = std::hypot(length[c], a(r, c));
  }
  for (double& l : length) l = l > 0.0 ? l : 1.0;
  for (std::size_t r = 0; r < a.rows(); ++r) {
    for (std::size_t c = 0; c < a.columns(); ++c) a(r, c) /= length[c];
  }
  return length;
}

}  // namespace

LinearFit least_squares(const Matrix& design, std::span<const double> y, std::span<const double> weights,
                        Weights kind) {
  require(y.size() == design.rows() && (weights.empty() || weights.size() == y.size()), "the lengths do not fit");
  require(design.columns() > 0 && design.rows() >= design.columns(), "there are fewer observations than unknowns");
  require(finite(design.values()) && finite(y) && finite(weights), "a number is not finite");
  require(std::ranges::all_of(weights, [](double w) { return w >= 0.0; }), "a weight is negative");

  Matrix a = design;
  std::vector<double> b(y.begin(), y.end());
  for (std::size_t r = 0; r < weights.size(); ++r) {
    const double root = std::sqrt(weights[r]);
    for (double& x : a.row(r)) x *= root;
    b[r] *= root;
  }
  const std::vector<double> length = scale_columns(a);
  LeastNormSolution solution = solve_least_norm(a, b);

  LinearFit fit{{}, std::move(solution.normal_inverse), 0.0, 0.0, solution.rank};
  const std::vector<double> model = product(a, solution.x);
  for (std::size_t r = 0; r < b.size(); ++r) fit.residual_sum += (model[r] - b[r]) * (model[r] - b[r]);
  fit.dof = static_cast<double>(b.size() - fit.rank);
  fit.x = std::move(solution.x);
  const double scale = kind == Weights::relative && fit.dof > 0.0 ? fit.residual_sum / fit.dof : 1.0;
  for (std::size_t i = 0; i < fit.x.size(); ++i) {
    fit.x[i] /= length[i];
    for (std::size_t j = 0; j < fit.x.size(); ++j) fit.covariance(i, j) *= scale / (length[i] * length[j]);
  }
  return fit;
}

ComplexLinearFit least_squares(std::span<const std::complex<double>> design, std::size_t unknowns,
                               std::span<const std::complex<double>> y, std::span<const double> weights, Weights kind) {
  require(design.size() == y.size() * unknowns && (weights.empty() || weights.size() == y.size()),
          "the lengths do not fit");
  Matrix real(2 * y.size(), 2 * unknowns);
  std::vector<double> right(2 * y.size());
  std::vector<double> both(2 * weights.size());
  for (std::size_t r = 0; r < y.size(); ++r) {
    for (std::size_t c = 0; c < unknowns; ++c) {
      const std::complex<double> a = design[r * unknowns + c];
      real(2 * r, 2 * c) = a.real();
      real(2 * r, 2 * c + 1) = -a.imag();
      real(2 * r + 1, 2 * c) = a.imag();
      real(2 * r + 1, 2 * c + 1) = a.real();
    }
    right[2 * r] = y[r].real();
    right[2 * r + 1] = y[r].imag();
    if (!weights.empty()) both[2 * r] = both[2 * r + 1] = weights[r];
  }
  LinearFit fit = least_squares(real, right, both, kind);
  ComplexLinearFit result{{}, std::move(fit.covariance), fit.residual_sum, fit.dof};
  for (std::size_t c = 0; c < unknowns; ++c) result.x.emplace_back(fit.x[2 * c], fit.x[2 * c + 1]);
  return result;
}

}  // namespace stillmass::numeric
