#include "recording/csv_ambiguity.hpp"

#include <algorithm>
#include <string_view>
#include <vector>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"

namespace stillmass::recording {
namespace {

bool all_digits(std::string_view cell) {
  return !cell.empty() && std::all_of(cell.begin(), cell.end(), [](char c) { return c >= '0' && c <= '9'; });
}

// Comma-separated rows in which every comma could stand before decimals: only whole numbers, and digits alone after
// some comma. A header line with a name for each column settles it.
bool comma_is_ambiguous(const CsvDialect& dialect) {
  if (dialect.separator != ',' || dialect.quoted) return false;
  std::vector<std::string_view> cells;
  for (const std::string& line : dialect.header) {
    split_cells(line, ',', cells);
    const auto named = std::count_if(cells.begin(), cells.end(),
                                     [](std::string_view cell) { return read_cell(cell, '.').kind == CellKind::text; });
    if (static_cast<std::size_t>(named) >= dialect.numeric.size()) return false;
  }
  std::vector<bool> only_digits(dialect.numeric.size(), true);
  for (const std::string& row : dialect.rows) {
    if (row.find('.') != std::string::npos) return false;
    split_cells(row, ',', cells);
    for (std::size_t c = 0; c < only_digits.size(); ++c) {
      if (c >= cells.size() || !all_digits(cells[c])) only_digits[c] = false;
    }
  }
  return std::find(only_digits.begin() + 1, only_digits.end(), true) != only_digits.end();
}

// Cells such as "1,234" in every row: decimals, or thousands?
bool thousands_possible(const CsvDialect& dialect) {
  if (dialect.decimal != ',') return false;
  bool seen = false;
  std::vector<std::string_view> cells;
  for (const std::string& row : dialect.rows) {
    split_cells(row, dialect.separator, cells);
    for (const std::string_view cell : cells) {
      const std::string_view number = bare(cell);
      const auto comma = number.find(',');
      if (comma == std::string_view::npos) continue;
      std::string_view whole = number.substr(0, comma);
      if (!whole.empty() && (whole.front() == '-' || whole.front() == '+')) whole.remove_prefix(1);
      const bool grouped = all_digits(whole) && whole.size() <= 3 && whole.front() != '0' &&
                           all_digits(number.substr(comma + 1)) && number.size() - comma - 1 == 3;
      if (!grouped) return false;
      seen = true;
    }
  }
  return seen;
}

}  // namespace

void refuse_ambiguity(const CsvDialect& dialect, const std::string& where) {
  if (comma_is_ambiguous(dialect)) {
    throw base::file_error(
        where,
        fmt::format("a comma in \"{}\" may be a decimal sign or stand between columns",
                    base::printable(base::trimmed(dialect.rows.front()).substr(0, 40))),
        "export it with a decimal point, with semicolons between columns, or with a line of column names");
  }
  if (thousands_possible(dialect)) {
    throw base::file_error(where, "a comma in the numbers may be a decimal sign or stand between thousands",
                           "export it with a decimal point and without a sign between thousands");
  }
}

}  // namespace stillmass::recording
