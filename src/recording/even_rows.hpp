#pragma once

#include <cstdint>
#include <memory>
#include <span>
#include <vector>

#include "recording/csv_rows.hpp"

namespace stillmass::recording {

/// Frequency up to which the interpolation of `EvenRows` alters a tone by less than 1 % of its amplitude, Hz, for steps
/// of at most `widest_step_s`. The polynomial of degree 5 through six stamps errs, between the middle ones, by at most
/// max|f^(6)| / 6! times the product of the distances to the stamps, which is at most (15/8)^2 H^6; for a tone
/// |f^(6)| = (2 pi f)^6: relative error <= 0.004883 (2 pi f H)^6 (remainder of Lagrange interpolation, textbook).
double even_limit_hz(double widest_step_s);

/// The samples of rows with uneven time stamps, brought onto an even grid by the polynomial through the six stamps
/// around each instant. Rows whose stamp does not grow are passed over.
class EvenRows {
 public:
  explicit EvenRows(std::shared_ptr<const CsvSource> source);

  /// The next instants lie in that part.
  void enter(const TimedRows& part);
  /// The next instant may lie far ahead.
  void forget();
  /// Values of all channels at that time stamp (s, as printed; within the part). False in `good` for a channel where
  /// one of the six is not a number.
  void at(double time_s, std::span<double> values, std::vector<bool>& good);

 private:
  void restart(double time_s);
  bool read_more();

  std::shared_ptr<const CsvSource> source_;
  std::size_t channels_;
  CsvRows rows_;
  TimedRows part_;
  // A window of rows: times, values [row][channel], and which of them are numbers.
  std::vector<double> times_;
  std::vector<double> values_;
  std::vector<char> bad_;
  std::size_t cursor_ = 0;  // last stamp not after the last instant
  std::vector<double> block_values_;
  std::vector<double> block_times_;
  std::vector<CsvRows::Bad> block_bad_;
};

}  // namespace stillmass::recording
