#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/recording.hpp"

namespace stillmass::recording {

/// Rows that follow each other without a gap, as their time stamps say.
struct TimedRows {
  std::int64_t first_row = 0;
  std::int64_t rows = 0;
  double first_s = 0.0;  ///< time stamps as printed
  double last_s = 0.0;
  double start_s = 0.0;  ///< from the start of the recording; never runs back
};

/// A time stamp that is remembered, for a look at the whole at the end.
struct RowTime {
  std::int64_t row = 0;
  double time_s = 0.0;
};

/// What the time stamps of a recording amount to.
struct GridVerdict {
  double rate_hz = 0.0;
  bool even = true;            ///< false: the samples must be brought onto an even grid
  double widest_step_s = 0.0;  ///< within the parts
  std::vector<TimedRows> parts;
  std::vector<base::Finding> findings;  ///< gap, uneven_times
};

/// Decides from the time stamps, given one after the other, on rate, gaps and evenness. Thresholds are common practice:
/// a step is a gap from 1.5 steps on (more where the steps scatter), it is uneven if it departs from the common step by
/// more than 5 % and the resolution of the stamps; one uneven step in a thousand is tolerated.
class TimeGrid {
 public:
  /// first_times_s: the first rows, for the common step. resolution_s: last printed digit. single_precision: stamps
  /// went through 32-bit floats.
  TimeGrid(const std::vector<double>& first_times_s, double resolution_s, bool single_precision);

  void add(double time_s) {
    const double step = time_s - last_s_;
    if (rows_ == 0) {
      start_first(time_s);
    } else if (step > gap_from_s_ || step < back_from_s_) {
      start_next(time_s);
    } else if (step < least_even_s_ || step > most_even_s_) {
      ++uneven_;
      if (step > widest_step_s_) widest_step_s_ = step;
    }
    last_s_ = time_s;
    ++rows_;
  }
  double last_s() const { return last_s_; }
  /// From the start of the recording to the stamp given last.
  double elapsed_s() const { return parts_.empty() ? 0.0 : parts_.back().start_s + (last_s_ - parts_.back().first_s); }

  /// `remembered`: stamps here and there over the whole, ascending. Throws `Error` (file, at `where`) where no rate
  /// follows from the stamps.
  GridVerdict verdict(const std::vector<RowTime>& remembered, const std::string& where) const;

 private:
  void count_rate(const std::vector<double>& first_times_s, const std::vector<double>& steps);
  void start_first(double time_s);
  void start_next(double time_s);
  double resolution_at(double time_s) const;
  double rate(const std::vector<TimedRows>& parts) const;
  double largest_drift(const std::vector<TimedRows>& parts, const std::vector<RowTime>& remembered,
                       double rate_hz) const;

  double resolution_s_;
  double relative_resolution_;
  bool repeated_ = false;         // stamps repeat: they are coarser than the step
  double counted_rate_hz_ = 0.0;  // of repeated stamps, by the rows between their changes; 0: not known
  double counted_rows_ = 0.0;     // that it comes from
  double step_s_ = 0.0;           // common step
  double gap_from_s_ = 0.0;
  double back_from_s_ = 0.0;
  double least_even_s_ = 0.0;
  double most_even_s_ = 0.0;

  std::int64_t rows_ = 0;
  double last_s_ = 0.0;
  std::int64_t uneven_ = 0;
  double widest_step_s_ = 0.0;
  std::vector<TimedRows> parts_;
  std::vector<std::size_t> jumps_back_;  // parts that begin with one
};

}  // namespace stillmass::recording
