#include "recording/csv_between.hpp"

#include <algorithm>
#include <string_view>

#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"
#include "recording/csv_header.hpp"

namespace stillmass::recording {
namespace {

// The line as both sides of a comparison have it.
std::string normalised(std::string_view line, const CsvTable& table) {
  std::string text(base::trimmed(line));
  if (table.decimal == ',' && table.separator != ',') std::replace(text.begin(), text.end(), ',', '.');
  return text;
}

std::vector<std::string_view> cells_of(std::string_view line, const CsvTable& table) {
  std::vector<std::string_view> cells;
  split_cells(line, table.separator, cells);
  while (!cells.empty() && bare(cells.back()).empty()) cells.pop_back();
  return cells;
}

// Names for several columns, one of them of time or with a unit.
bool names_columns(const std::vector<std::string_view>& cells, const CsvTable& table) {
  std::size_t texts = 0;
  bool labelled = false;
  for (const std::string_view cell : cells) {
    if (read_cell(cell, table.decimal).kind != CellKind::text) continue;
    ++texts;
    const ColumnLabel label = read_label(base::printable(bare(cell)));
    labelled = labelled || label.is_time || label.unit.has_value();
  }
  return texts >= 2 && labelled;
}

}  // namespace

TextBetween kind_of(const std::vector<std::string>& lines, std::string_view next_row, const CsvTable& table) {
  bool named = false;
  const std::size_t wanted_cells = cells_of(next_row, table).size();
  for (const std::string& line : lines) {
    const auto cells = cells_of(line, table);
    if (!names_columns(cells, table)) continue;
    const std::string wanted = normalised(line, table);
    const bool again = std::any_of(table.header.begin(), table.header.end(),
                                   [&](const std::string& known) { return normalised(known, table) == wanted; });
    if (again) return TextBetween::header_again;
    named = named || cells.size() == wanted_cells;
  }
  return named ? TextBetween::other_table : TextBetween::text;
}

}  // namespace stillmass::recording
