#include "simulate/integrate.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::simulate {
namespace {

using numeric::Matrix;

double row_norm(const Matrix& a) {
  double norm = 0.0;
  for (std::size_t i = 0; i < a.rows(); ++i) {
    double sum = 0.0;
    for (const double value : a.row(i)) sum += std::abs(value);
    norm = std::max(norm, sum);
  }
  return norm;
}

Matrix scaled(Matrix a, double factor) {
  for (double& value : a.values()) value *= factor;
  return a;
}

void add(Matrix& sum, const Matrix& a) {
  for (std::size_t i = 0; i < sum.values().size(); ++i) sum.values()[i] += a.values()[i];
}

// The state's equation with the force as a part of it: d/ds (x, F, dF) over one step, dF = F1 - F0.
Matrix augmented(std::span<const double> mass, const Matrix& damping, const Matrix& stiffness, double step_s) {
  const std::size_t n = mass.size();
  Matrix a(4 * n, 4 * n);
  for (std::size_t i = 0; i < n; ++i) {
    a(i, n + i) = step_s;
    for (std::size_t j = 0; j < n; ++j) {
      a(n + i, j) = -stiffness(i, j) / mass[i] * step_s;
      a(n + i, n + j) = -damping(i, j) / mass[i] * step_s;
    }
    a(n + i, 2 * n + i) = step_s / mass[i];
    a(2 * n + i, 3 * n + i) = 1.0;
  }
  return a;
}

}  // namespace

Matrix exponential(const Matrix& a) {
  int halvings = 0;
  while (std::ldexp(row_norm(a), -halvings) > 0.5) ++halvings;
  const Matrix small = scaled(a, std::ldexp(1.0, -halvings));
  Matrix sum(a.rows(), a.columns());
  for (std::size_t i = 0; i < a.rows(); ++i) sum(i, i) = 1.0;
  Matrix term = sum;
  for (int k = 1; k <= 16; ++k) {  // 0.5^17 / 17! = 2e-20
    term = scaled(numeric::product(term, small), 1.0 / k);
    add(sum, term);
  }
  for (int i = 0; i < halvings; ++i) sum = numeric::product(sum, sum);
  return sum;
}

Propagator::Propagator(std::span<const double> mass, const Matrix& damping, const Matrix& stiffness, double step_s)
    : dofs_(mass.size()),
      mass_(mass.begin(), mass.end()),
      damping_(damping),
      stiffness_(stiffness),
      columns_(4 * dofs_, 2 * dofs_),
      next_(2 * dofs_) {
  const Matrix e = exponential(augmented(mass, damping, stiffness, step_s));
  for (std::size_t i = 0; i < 2 * dofs_; ++i) {
    for (std::size_t j = 0; j < 2 * dofs_; ++j) columns_(j, i) = e(i, j);
    for (std::size_t j = 0; j < dofs_; ++j) {
      const double of_force = e(i, 2 * dofs_ + j);
      const double of_change = e(i, 3 * dofs_ + j);
      columns_(2 * dofs_ + j, i) = of_force - of_change;
      columns_(3 * dofs_ + j, i) = of_change;
    }
  }
}

void Propagator::step(std::vector<double>& state, std::span<const double> force_now,
                      std::span<const double> force_next) {
  std::ranges::fill(next_, 0.0);
  std::size_t entry = 0;
  const auto add_all = [&](std::span<const double> values) {
    for (const double value : values) {
      const auto column = columns_.row(entry++);
      for (std::size_t i = 0; i < next_.size(); ++i) next_[i] += value * column[i];
    }
  };
  add_all(state);
  add_all(force_now);
  add_all(force_next);
  std::swap(state, next_);
}

std::vector<double> Propagator::acceleration_row(std::span<const double> pattern) const {
  std::vector<double> row(3 * dofs_, 0.0);
  for (std::size_t i = 0; i < dofs_; ++i) {
    const double weight = pattern[i] / mass_[i];
    for (std::size_t j = 0; j < dofs_; ++j) {
      row[j] -= weight * stiffness_(i, j);
      row[dofs_ + j] -= weight * damping_(i, j);
    }
    row[2 * dofs_ + i] = weight;
  }
  return row;
}

}  // namespace stillmass::simulate
