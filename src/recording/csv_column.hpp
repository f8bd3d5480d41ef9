#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "recording/timestamp.hpp"

namespace stillmass::recording {

struct CsvDialect;

/// One column of the first rows, for a look at what kind of numbers stand in it; cells without a number are left out.
struct CsvColumn {
  std::vector<double> values;
  std::vector<std::string> texts;
  bool stamps = false;   ///< dates or times of day
  StampReading reading;  ///< of stamps

  std::vector<double> steps() const;
  double median_step() const;
  /// Time goes on, but for a restart of the clock here and there.
  bool grows() const;
  bool moves() const;
  /// Runs against the time from row to row.
  bool runs_back() const;
  /// Falls in at least one step; is the same in two rows that follow each other.
  bool turns_back() const;
  bool repeats() const;
  /// Grows by nearly equal steps, over enough rows to be time even without a name.
  bool grows_evenly() const;
  bool whole_numbers() const;
  /// 1, 2, 3, ...
  bool counts_rows() const;
  /// Whole numbers that mostly count the rows.
  bool counts() const;
  /// Value of the last printed digit: 0.001 for "0.048", 1e-5 for "1.25E-3"; of the finest number.
  double last_digit() const;
};

/// The columns of the first rows, in one pass over them.
std::vector<CsvColumn> columns_of(const CsvDialect& dialect);
const CsvColumn& column_of(const CsvDialect& dialect, std::size_t field);

}  // namespace stillmass::recording
