#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <type_traits>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/base/parallel.hpp"

namespace stillmass::numeric {

/// How an input is distributed, by its mean and standard deviation.
enum class Distribution {
  normal,
  lognormal,    ///< for what can only be positive: mean > 0
  rectangular,  ///< half-width sqrt 3 times the standard deviation
};

/// One uncertain input of a calculation.
struct Input {
  std::string name;
  double mean = 0.0;
  double u = 0.0;  ///< standard deviation, >= 0
  Distribution distribution = Distribution::normal;
};

/// An estimate as an input. u is widened for few degrees of freedom (`base::widened`); where the estimate has none,
/// `u_where_unknown` (absolute) stands in.
Input input_of(std::string name, const base::Estimate& estimate, Distribution distribution, double u_where_unknown);
/// A rectangular input between two limits.
Input rectangular_input(std::string name, base::Interval limits);

/// Draws of correlated inputs as a function of (seed, case, input): the same on any number of threads. The correlation
/// is that of the underlying normal numbers (exact for normal inputs; for others Gaussian-copula, close to it).
class Cases {
 public:
  /// correlation: row by row, inputs x inputs, symmetric with ones on the diagonal; empty: independent inputs.
  /// Throws `Error` (usage) for a matrix of wrong size, not symmetric or not positive semidefinite, for a u that is
  /// negative or not finite, for a lognormal input with a mean that is not positive.
  Cases(std::vector<Input> inputs, const std::vector<double>& correlation, std::uint64_t seed);

  const std::vector<Input>& inputs() const { return inputs_; }
  /// Fills `values` (one per input) with case number `n`.
  void draw(std::uint64_t n, std::span<double> values) const;

 private:
  std::vector<Input> inputs_;
  std::vector<double> factor_;  // lower triangle of the correlation's Cholesky factor, row by row
  std::uint64_t seed_;
};

/// The first `count` cases, case by case: values[n * inputs + i].
std::vector<double> draw_all(const Cases& cases, std::size_t count, const base::Context& context);

/// f(values of the inputs) for `count` cases, in the order of the cases.
template <class F>
auto evaluate(const Cases& cases, std::size_t count, const base::Context& context, F f) {
  using Value = std::decay_t<std::invoke_result_t<F, std::span<const double>>>;
  std::vector<Value> all;
  all.reserve(count);
  base::for_ranges(
      context, count, 64,
      [&](std::size_t begin, std::size_t end) {
        std::vector<double> values(cases.inputs().size());
        std::vector<Value> part;
        part.reserve(end - begin);
        for (std::size_t n = begin; n < end; ++n) {
          cases.draw(n, values);
          part.push_back(f(std::span<const double>(values)));
        }
        return part;
      },
      [&](const std::vector<Value>& part) { all.insert(all.end(), part.begin(), part.end()); });
  return all;
}

/// What came out of many cases.
class Outcome {
 public:
  /// Throws `Error` (internal) for no values or values that are not finite.
  explicit Outcome(std::vector<double> values);

  double mean() const { return mean_; }
  /// Standard deviation of one case, n - 1 in the divisor; 0 for a single case.
  double u() const { return u_; }
  /// p from 0 to 1, linear between order statistics.
  double quantile(double p) const;
  double median() const { return quantile(0.5); }
  /// The interval that leaves (1 - p)/2 of the cases on either side.
  base::Interval symmetric_interval(double p) const;
  /// The shortest interval that holds the fraction p of the cases (JCGM 101, 5.3.4).
  base::Interval shortest_interval(double p) const;
  /// Fraction of the cases at or below x.
  double fraction_up_to(double x) const;
  /// Mean and standard deviation as an estimate.
  base::Estimate estimate(base::Quantity quantity) const;

 private:
  std::vector<double> sorted_;
  double mean_ = 0.0;
  double u_ = 0.0;
};

/// How much of the spread of an outcome one input explains.
struct Driver {
  std::string input;
  double share = 0.0;  ///< of the variance, 0 to 1
};

/// Share of the outcome's variance explained by each input alone: Var(E[y | x_i]) / Var(y), the conditional mean taken
/// over classes of equal count and corrected for their finite size; finds effects that are not monotone. Largest
/// first. The shares of correlated inputs overlap, so their sum may exceed 1. `draws`: as from `draw_all`.
/// Source: Saltelli et al., Global Sensitivity Analysis, 2008, first-order index (from memory).
std::vector<Driver> drivers(const Cases& cases, std::span<const double> draws, std::span<const double> outcome);

}  // namespace stillmass::numeric
