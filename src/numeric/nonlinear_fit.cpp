#include "stillmass/numeric/nonlinear_fit.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numeric>
#include <optional>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/decomposition.hpp"

namespace stillmass::numeric {
namespace {

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "numeric/nonlinear_fit", what);
}

double sum_of_squares(std::span<const double> r) { return std::inner_product(r.begin(), r.end(), r.begin(), 0.0); }

/// The problem within its bounds.
class Bounded {
 public:
  Bounded(const FitProblem& problem, const FitOptions& options, std::size_t count) : problem_(problem) {
    constexpr double infinity = std::numeric_limits<double>::infinity();
    lower_ = options.lower.empty() ? std::vector<double>(count, -infinity) : options.lower;
    upper_ = options.upper.empty() ? std::vector<double>(count, infinity) : options.upper;
    require(lower_.size() == count && upper_.size() == count, "there must be one bound a parameter");
    for (std::size_t j = 0; j < count; ++j) require(lower_[j] <= upper_[j], "a lower bound lies above its upper bound");
  }

  double clamped(std::size_t j, double x) const { return std::clamp(x, lower_[j], upper_[j]); }
  bool pressed(std::size_t j, double x, double gradient) const {
    return (x <= lower_[j] && gradient > 0.0) || (x >= upper_[j] && gradient < 0.0);
  }
  bool at_bound(std::size_t j, double x) const { return x <= lower_[j] || x >= upper_[j]; }

  std::vector<double> residual(std::span<const double> p) const {
    std::vector<double> r(problem_.residuals);
    problem_.residual(p, r);
    return r;
  }

  Matrix jacobian(std::span<const double> p) const {
    Matrix j(problem_.residuals, p.size());
    if (problem_.jacobian) {
      problem_.jacobian(p, j);
    } else {
      for (std::size_t c = 0; c < p.size(); ++c) difference(p, c, j);
    }
    return j;
  }

 private:
  void difference(std::span<const double> p, std::size_t c, Matrix& j) const {
    const double step = std::cbrt(std::numeric_limits<double>::epsilon()) * (p[c] != 0.0 ? std::abs(p[c]) : 1.0);
    std::vector<double> at(p.begin(), p.end());
    at[c] = clamped(c, p[c] + step);
    const double high = at[c];
    const std::vector<double> above = residual(at);
    at[c] = clamped(c, p[c] - step);
    const std::vector<double> below = residual(at);
    if (high == at[c]) return;
    for (std::size_t r = 0; r < above.size(); ++r) j(r, c) = (above[r] - below[r]) / (high - at[c]);
  }

  const FitProblem& problem_;
  std::vector<double> lower_;
  std::vector<double> upper_;
};

/// The problem made linear at one point: J^T J and J^T r of the free parameters, their columns scaled to length 1.
struct Linearised {
  std::vector<std::size_t> free;
  std::vector<double> length;
  Matrix normal;
  std::vector<double> gradient;
};

Linearised linearise(const Bounded& bounded, std::span<const double> p, std::span<const double> residual) {
  const Matrix j = bounded.jacobian(p);
  std::vector<double> square(p.size(), 0.0);
  std::vector<double> slope(p.size(), 0.0);
  for (std::size_t r = 0; r < j.rows(); ++r) {
    const auto row = j.row(r);
    for (std::size_t c = 0; c < p.size(); ++c) {
      square[c] += row[c] * row[c];
      slope[c] += row[c] * residual[r];
    }
  }

  Linearised linear;
  for (std::size_t c = 0; c < p.size(); ++c) {
    if (!(square[c] > 0.0) || !std::isfinite(square[c]) || bounded.pressed(c, p[c], slope[c])) continue;
    linear.free.push_back(c);
    linear.length.push_back(std::sqrt(square[c]));
    linear.gradient.push_back(slope[c] / linear.length.back());
  }
  const std::size_t n = linear.free.size();
  linear.normal = Matrix(n, n);
  for (std::size_t r = 0; r < j.rows(); ++r) {
    const auto row = j.row(r);
    for (std::size_t a = 0; a < n; ++a) {
      const double left = row[linear.free[a]];
      for (std::size_t b = 0; b <= a; ++b) linear.normal(a, b) += left * row[linear.free[b]];
    }
  }
  for (std::size_t a = 0; a < n; ++a) {
    for (std::size_t b = 0; b <= a; ++b) {
      linear.normal(a, b) /= linear.length[a] * linear.length[b];
      linear.normal(b, a) = linear.normal(a, b);
    }
  }
  return linear;
}

std::optional<std::vector<double>> damped_step(const Linearised& linear, double damping) {
  Matrix damped = linear.normal;
  for (std::size_t a = 0; a < damped.rows(); ++a) damped(a, a) += damping;
  auto step = solve_positive_definite(damped, linear.gradient);
  if (step) {
    for (double& h : *step) h = -h;
  }
  return step;
}

void add_covariance(const Linearised& linear, double scale, NonlinearFit& fit) {
  if (linear.free.empty()) return;
  const SymmetricEigen eigen = eigen_symmetric(linear.normal);
  const double cutoff = 1e-14 * eigen.values.back();
  for (std::size_t k = 0; k < eigen.values.size(); ++k) {
    if (eigen.values[k] <= cutoff) continue;
    for (std::size_t a = 0; a < linear.free.size(); ++a) {
      for (std::size_t b = 0; b < linear.free.size(); ++b) {
        fit.covariance(linear.free[a], linear.free[b]) +=
            scale * eigen.vectors(a, k) * eigen.vectors(b, k) / (eigen.values[k] * linear.length[a] * linear.length[b]);
      }
    }
  }
}

}  // namespace

std::string_view name(StopReason reason) {
  switch (reason) {
    case StopReason::converged:
      return "converged";
    case StopReason::no_descent:
      return "no descent";
    case StopReason::too_many_steps:
      return "too many steps";
  }
  return "";
}

double NonlinearFit::u(std::size_t i) const { return std::sqrt(covariance(i, i)); }

NonlinearFit nonlinear_fit(const FitProblem& problem, std::vector<double> start, const FitOptions& options) {
  const std::size_t count = start.size();
  require(count > 0 && problem.residuals >= count, "there are fewer residuals than parameters");
  const Bounded bounded(problem, options, count);
  std::vector<double> p = std::move(start);
  for (std::size_t j = 0; j < count; ++j) p[j] = bounded.clamped(j, p[j]);
  std::vector<double> residual = bounded.residual(p);
  double sum = sum_of_squares(residual);
  require(std::isfinite(sum), "the residuals are not finite at the start");

  NonlinearFit fit;
  Linearised linear = linearise(bounded, p, residual);
  double damping = 1e-3;
  double growth = 2.0;
  while (fit.iterations < options.max_iterations) {
    if (linear.free.empty() || sum == 0.0) {
      fit.reason = StopReason::converged;
      break;
    }
    if (damping > 1e15) {
      fit.reason = StopReason::no_descent;
      break;
    }
    ++fit.iterations;
    const auto step = damped_step(linear, damping);
    std::vector<double> next = p;
    double promised = 0.0;
    bool moved = false;
    if (step) {
      for (std::size_t a = 0; a < step->size(); ++a) {
        const std::size_t j = linear.free[a];
        next[j] = bounded.clamped(j, p[j] + (*step)[a] / linear.length[a]);
        promised += (*step)[a] * (damping * (*step)[a] - linear.gradient[a]);
        moved = moved || std::abs(next[j] - p[j]) > options.tolerance * std::abs(p[j]);
      }
    }
    const std::vector<double> next_residual = step ? bounded.residual(next) : residual;
    const double next_sum = step ? sum_of_squares(next_residual) : sum;
    const bool quiet =
        step &&
        (!moved || (promised <= options.tolerance * sum && std::abs(sum - next_sum) <= options.tolerance * sum));
    if (step && std::isfinite(next_sum) && next_sum < sum) {
      const double gain = (sum - next_sum) / promised;
      p = std::move(next);
      residual = next_residual;
      sum = next_sum;
      linear = linearise(bounded, p, residual);
      damping *= std::max(1.0 / 3.0, 1.0 - std::pow(2.0 * gain - 1.0, 3));
      growth = 2.0;
    } else {
      damping *= growth;
      growth *= 2.0;
    }
    if (quiet) {
      fit.reason = StopReason::converged;
      break;
    }
  }

  fit.residual_sum = sum;
  fit.dof = static_cast<double>(problem.residuals - linear.free.size());
  fit.covariance = Matrix(count, count);
  add_covariance(linear, options.absolute || fit.dof == 0.0 ? 1.0 : sum / fit.dof, fit);
  for (std::size_t j = 0; j < count; ++j) fit.at_bound.push_back(bounded.at_bound(j, p[j]));
  fit.parameters = std::move(p);
  return fit;
}

}  // namespace stillmass::numeric
