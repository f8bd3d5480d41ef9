#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/recording/reader.hpp"

#include "recording/csv_column.hpp"
#include "recording/csv_dialect.hpp"
#include "recording/csv_header.hpp"

namespace stillmass::recording {

/// The column that holds the times.
struct TimeColumn {
  std::size_t field = 0;
  CsvColumn column;
  double to_s = 1.0;
  bool counts = false;       ///< row numbers: times by the stated rate
  bool other_table = false;  ///< what stands before it has times of its own
  std::string text;          ///< for people: "time in column 1 [ms]"
};

/// The column that the user names; else one named like time or holding time stamps; else the first, if it grows evenly
/// and nothing says that it is something else; else, with a stated rate, a column of row numbers. Its unit: as the user
/// or the header says; seconds, ms, us or ns since 1970 where the numbers are of that size; that which fits the stated
/// rate; s where there are decimals. Throws `Error` (usage) where the unit is not known or an option does not fit.
std::optional<TimeColumn> find_time_column(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels,
                                           const OpenOptions& options, const std::string& where);

}  // namespace stillmass::recording
