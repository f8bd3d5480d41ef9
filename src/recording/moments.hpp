#pragma once

#include <cstdint>
#include <limits>
#include <span>

namespace stillmass::recording {

/// Count, mean, sum of squares about the mean, extremes and smallest change of a signal; mergeable (Chan, Golub,
/// LeVeque 1979: pairwise update of mean and sum of squares, from memory).
struct Moments {
  std::int64_t count = 0;
  double mean = 0.0;
  double squares = 0.0;
  double least = std::numeric_limits<double>::infinity();
  double largest = -std::numeric_limits<double>::infinity();

  void add(std::span<const double> samples);
  void merge(const Moments& other);
  double rms() const;  ///< about the mean; 0 without samples
};

/// Smallest difference, other than 0, between neighbours; infinity where there is none.
double smallest_change(std::span<const double> samples);

}  // namespace stillmass::recording
