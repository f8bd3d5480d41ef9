#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/interval.hpp"

namespace stillmass::numeric {

/// Linear between the order statistics (Hyndman & Fan 1996, type 7; SciPy's and NumPy's default). probability 0 to 1;
/// values not empty, else `Error` (internal).
double quantile(std::vector<double> values, double probability);
double median(std::vector<double> values);
/// Median of |x - median|, times 1.4826: the standard deviation, where the values are normal.
double mad_scale(std::vector<double> values);

/// Least and greatest value; values not empty, else `Error` (internal).
base::Interval extremes(std::span<const double> values);

/// Mean and moments in one pass, mergeable: the result does not depend on the order beyond rounding.
/// Source: Welford 1962; merging after Chan, Golub & LeVeque 1983 and Pebay 2008 (third and fourth moment; from
/// memory).
class RunningMoments {
 public:
  void add(double x);
  void add(std::span<const double> values);
  void merge(const RunningMoments& other);

  std::uint64_t count() const { return count_; }
  double mean() const { return mean_; }
  /// With n - 1; absent for fewer than two values.
  std::optional<double> variance() const;
  std::optional<double> standard_deviation() const;
  /// Root of the mean square; absent where empty.
  std::optional<double> rms() const;
  /// Fourth central moment over the square of the second (3 for normal values, no bias correction); absent where all
  /// values are equal.
  std::optional<double> kurtosis() const;

 private:
  std::uint64_t count_ = 0;
  double mean_ = 0.0;
  double m2_ = 0.0;
  double m3_ = 0.0;
  double m4_ = 0.0;
};

/// Pearson's correlation of two signals in one pass, mergeable.
class RunningCorrelation {
 public:
  void add(double x, double y);
  void add(std::span<const double> x, std::span<const double> y);
  void merge(const RunningCorrelation& other);

  std::uint64_t count() const { return count_; }
  /// -1 to 1; absent where one of them does not vary.
  std::optional<double> correlation() const;

 private:
  std::uint64_t count_ = 0;
  double mean_x_ = 0.0;
  double mean_y_ = 0.0;
  double xx_ = 0.0;
  double yy_ = 0.0;
  double xy_ = 0.0;
};

std::optional<double> kurtosis(std::span<const double> values);
std::optional<double> correlation(std::span<const double> x, std::span<const double> y);

}  // namespace stillmass::numeric
