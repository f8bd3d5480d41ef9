#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/unit.hpp"

#include "recording/csv_dialect.hpp"

namespace stillmass::recording {

/// What the header says of one column.
struct ColumnLabel {
  std::string name;  ///< without its unit; may be empty
  std::optional<base::Unit> unit;
  bool is_time = false;     ///< named like time
  bool is_counter = false;  ///< named like a row number
};

/// A name with its unit, as people write it: "Ax [g]", "acc_x (m/s^2)", "Velocity mm/s", "v / (mm/s)", "a in g".
ColumnLabel read_label(std::string_view cell);

/// One label for each column of the dialect: names from the last header line that names the columns, units from there
/// or from the last line that has a unit for each column of numbers (its first cell may be a word such as "Unit").
/// `utf8` turns bytes of the file into UTF-8.
std::vector<ColumnLabel> read_header(const CsvDialect& dialect, const TextSource& text);

}  // namespace stillmass::recording
