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

std::string_view without_sign(std::string_view number) {
  if (!number.empty() && (number.front() == '-' || number.front() == '+')) number.remove_prefix(1);
  return number;
}

// One to three digits, not beginning with 0, and three digits behind the sign: "1,234".
bool grouped(std::string_view number, char sign) {
  const auto at = number.find(sign);
  if (at == std::string_view::npos) return false;
  const std::string_view whole = number.substr(0, at);
  return all_digits(whole) && whole.size() <= 3 && whole.front() != '0' && all_digits(number.substr(at + 1)) &&
         number.size() - at - 1 == 3;
}

template <typename Visit>
void for_each_number(const CsvDialect& dialect, Visit visit) {
  std::vector<std::string_view> cells;
  for (const std::string& row : dialect.rows) {
    split_cells(row, dialect.separator, cells);
    for (const std::string_view cell : cells) {
      if (!visit(without_sign(bare(cell)))) return;
    }
  }
}

// Every decimal sign stands before three digits: decimals, or thousands? Where commas stand between the columns, a
// point is a decimal sign.
bool thousands_possible(const CsvDialect& dialect) {
  if (dialect.decimal == '.' && dialect.separator == ',') return false;
  bool seen = false;
  bool all = true;
  for_each_number(dialect, [&](std::string_view number) {
    const CellKind kind = read_cell(number, dialect.decimal).kind;
    const bool signed_number = kind == CellKind::number && number.find(dialect.decimal) != std::string_view::npos;
    const bool fine_stamp = kind == CellKind::time && fraction_digits(number) > 0;
    seen = seen || signed_number || fine_stamp;
    all = all && !fine_stamp && (!signed_number || grouped(number, dialect.decimal));
    return all;
  });
  return seen && all;
}

std::string cell_with_thousands(const CsvDialect& dialect) {
  std::string found;
  for_each_number(dialect, [&](std::string_view number) {
    if (is_grouped_number(number)) found = base::printable(number);
    return found.empty();
  });
  return found;
}

}  // namespace

bool has_typeset_minus(std::string_view cell, char decimal) {
  constexpr std::string_view minus = "\xE2\x88\x92";
  cell = bare(cell);
  return cell.starts_with(minus) && read_cell(cell.substr(minus.size()), decimal).kind == CellKind::number;
}

bool is_grouped_number(std::string_view cell) {
  cell = without_sign(bare(cell));
  for (const std::string_view signs : {".,", ",.", "'.", "',"}) {
    std::string_view rest = cell;
    const auto whole = rest.find(signs[0]);
    if (whole == std::string_view::npos || whole > 3 || !all_digits(rest.substr(0, whole))) continue;
    if (rest.front() == '0') continue;
    rest.remove_prefix(whole);
    int groups = 0;
    while (rest.size() >= 4 && rest.front() == signs[0] && all_digits(rest.substr(1, 3))) {
      rest.remove_prefix(4);
      ++groups;
    }
    const bool decimals = rest.size() > 1 && rest.front() == signs[1] && all_digits(rest.substr(1));
    if ((groups >= 1 && decimals) || (groups >= 2 && rest.empty())) return true;
  }
  return false;
}

namespace {

// "10:15:00,250,1.5": clock times without a fraction and, behind the comma, digits of equal number in every row, three
// or six: a column, or the fraction?
bool fraction_split_off(const CsvDialect& dialect) {
  if (dialect.separator != ',' || dialect.quoted) return false;
  std::vector<std::string_view> cells;
  for (std::size_t c = 0; c + 1 < dialect.numeric.size(); ++c) {
    bool all = true;
    for (const std::string& row : dialect.rows) {
      split_cells(row, ',', cells);
      const bool split = c + 1 < cells.size() && parse_timestamp(cells[c]) && fraction_digits(cells[c]) == 0 &&
                         all_digits(bare(cells[c + 1])) &&
                         (bare(cells[c + 1]).size() == 3 || bare(cells[c + 1]).size() == 6);
      all = all && split;
      if (!all) break;
    }
    if (all) return true;
  }
  return false;
}

}  // namespace

void refuse_ambiguity(const CsvDialect& dialect, const TextOptions& options, const std::string& where) {
  if (!options.separator && !options.decimal && comma_is_ambiguous(dialect)) {
    throw base::file_error(
        where,
        fmt::format("a comma in \"{}\" may be a decimal sign or stand between columns",
                    base::printable(base::trimmed(dialect.rows.front()).substr(0, 40))),
        "say which with --separator comma or --decimal comma, or export it with semicolons between columns");
  }
  bool typeset = false;
  for_each_number(dialect, [&](std::string_view cell) {
    typeset = has_typeset_minus(cell, dialect.decimal);
    return !typeset;
  });
  if (typeset) {
    throw base::file_error(where, "has minus signs of typesetting (U+2212) in its numbers",
                           "replace them by hyphens, or export it as plain text");
  }
  if (fraction_split_off(dialect)) {
    throw base::file_error(where, "the comma behind the clock times may be a decimal sign or stand between columns",
                           "export it with a point in the times, or with semicolons between columns");
  }
  const std::string grouped_number = cell_with_thousands(dialect);
  if (!grouped_number.empty()) {
    throw base::file_error(where,
                           fmt::format("has numbers with a sign between thousands, such as \"{}\"", grouped_number),
                           "export it without such a sign");
  }
  if (!options.decimal && thousands_possible(dialect)) {
    const bool comma = dialect.decimal == ',';
    throw base::file_error(
        where,
        fmt::format("a {} in the numbers may be a decimal sign or stand between thousands", comma ? "comma" : "point"),
        fmt::format("if it is the decimal sign say --decimal {}; else export it without a sign "
                    "between thousands",
                    decimal_name(dialect.decimal)));
  }
}

}  // namespace stillmass::recording
