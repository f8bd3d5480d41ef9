#include "recording/csv_header.hpp"

#include <algorithm>
#include <array>

#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"

namespace stillmass::recording {
namespace {

constexpr auto time_names =
    std::to_array<std::string_view>({"t", "x_value", "x value", "elapsed", "elapsed time", "abs time", "absolute time",
                                     "rel time", "relative time", "seconds", "sec", "date/time", "datetime", "zeit"});
constexpr auto counter_names =
    std::to_array<std::string_view>({"index", "idx", "sample", "samples", "sample no", "no", "no.", "nr", "nr.", "#",
                                     "n", "row", "count", "counter", "scan", "record"});

template <std::size_t count>
bool among(const std::string& word, const std::array<std::string_view, count>& words) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

// A unit in brackets or alone; a plain number is no unit here, it is a name.
std::optional<base::Unit> unit_in(std::string_view text) {
  text = base::trimmed(text);
  if (text.size() >= 2 && (text.front() == '[' || text.front() == '(') && (text.back() == ']' || text.back() == ')')) {
    text = base::trimmed(text.substr(1, text.size() - 2));
  }
  if (text.empty() || text == "-" || text.find_first_not_of("0123456789.+-") == std::string_view::npos) return {};
  return base::unit_named(text);
}

void split_off(ColumnLabel& label, std::string_view name, std::optional<base::Unit> unit) {
  label.name = std::string(base::trimmed(name));
  label.unit = unit;
}

// "Ax [g]", "Ax(g)"
bool bracketed(std::string_view cell, ColumnLabel& label) {
  if (cell.empty() || (cell.back() != ']' && cell.back() != ')')) return false;
  const auto open = cell.find(cell.back() == ']' ? '[' : '(');
  if (open == std::string_view::npos) return false;
  const auto unit = unit_in(cell.substr(open));
  if (unit) split_off(label, cell.substr(0, open), unit);
  return unit.has_value();
}

// "a in g", "a / g", "Velocity mm/s"; a single letter without "in" or "/" is part of the name ("Motor N").
bool trailing(std::string_view cell, ColumnLabel& label) {
  for (const std::string_view between : {" in ", " / ", ", "}) {
    const auto at = cell.rfind(between);
    if (at == std::string_view::npos) continue;
    if (const auto unit = unit_in(cell.substr(at + between.size()))) {
      split_off(label, cell.substr(0, at), unit);
      return true;
    }
  }
  const auto blank = cell.rfind(' ');
  if (blank == std::string_view::npos || cell.size() - blank < 3) return false;
  const auto unit = unit_in(cell.substr(blank + 1));
  if (unit) split_off(label, cell.substr(0, blank), unit);
  return unit.has_value();
}

// "time_ms", "t_s"
void time_suffix(ColumnLabel& label) {
  const auto underline = label.name.rfind('_');
  if (!label.is_time || label.unit || underline == std::string::npos) return;
  const auto unit = base::unit_named(label.name.substr(underline + 1));
  if (unit && unit->quantity == base::Quantity::time) label.unit = unit;
}

std::vector<std::string> header_cells(std::string_view line, char separator) {
  if (is_blank_or_comment(line)) line.remove_prefix(std::min(line.find_first_of("#%/") + 1, line.size()));
  std::vector<std::string_view> parts;
  split_cells(line, separator, parts);
  std::vector<std::string> cells;
  for (const std::string_view part : parts) {
    // With blanks between columns, a unit in brackets belongs to the name before it.
    const bool goes_on = separator == ' ' && !cells.empty() && (part.starts_with('[') || part.starts_with('('));
    if (goes_on) {
      cells.back() += " " + std::string(part);
    } else {
      cells.emplace_back(bare(part));
    }
  }
  return cells;
}

// The columns of numbers of a line that spans them all.
std::vector<std::string> over_numbers(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  std::vector<std::string> over;
  if (cells.size() < dialect.numeric.size()) return over;
  for (std::size_t c = 0; c < dialect.numeric.size(); ++c) {
    if (dialect.numeric[c]) over.push_back(cells[c]);
  }
  return over;
}

bool are_units(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  std::vector<std::string> over = over_numbers(cells, dialect);
  if (over.size() > 1 && dialect.numeric.front() && !unit_in(over.front())) over.erase(over.begin());
  return !over.empty() &&
         std::all_of(over.begin(), over.end(), [](const std::string& cell) { return cell.empty() || unit_in(cell); }) &&
         std::any_of(over.begin(), over.end(), [](const std::string& cell) { return !cell.empty(); });
}

bool are_names(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  const std::vector<std::string> over = over_numbers(cells, dialect);
  const auto named = std::count_if(over.begin(), over.end(),
                                   [](const std::string& cell) { return read_cell(cell, '.').kind == CellKind::text; });
  return !over.empty() && 2 * static_cast<std::size_t>(named) > over.size();
}

// The separators a header line may have: that of the rows, else another that gives a cell for each column.
std::vector<std::string> cells_of(const std::string& line, const CsvDialect& dialect) {
  std::vector<std::string> cells = header_cells(line, dialect.separator);
  if (cells.size() > 1 || dialect.numeric.size() < 2) return cells;
  for (const char other : {'\t', ';', ',', ' '}) {
    std::vector<std::string> by_other = header_cells(line, other);
    if (by_other.size() == dialect.numeric.size()) return by_other;
  }
  return cells;
}

}  // namespace

ColumnLabel read_label(std::string_view cell) {
  ColumnLabel label;
  cell = base::trimmed(cell);
  if (!bracketed(cell, label) && !trailing(cell, label)) label.name = std::string(cell);
  const std::string low = base::lower(label.name);
  const bool time_unit = label.unit && label.unit->quantity == base::Quantity::time;
  label.is_time =
      low.starts_with("time") || among(low, time_names) || low.starts_with("t_") || (low.empty() && time_unit);
  label.is_counter = among(low, counter_names) && !label.unit;
  time_suffix(label);
  return label;
}

std::vector<ColumnLabel> read_header(const CsvDialect& dialect, const TextSource& text) {
  std::vector<std::string> names;
  std::vector<std::string> units;
  for (auto line = dialect.header.rbegin(); line != dialect.header.rend(); ++line) {
    const std::vector<std::string> cells = cells_of(text.utf8(*line), dialect);
    if (units.empty() && are_units(cells, dialect)) {
      units = cells;
    } else if (names.empty() && are_names(cells, dialect)) {
      names = cells;
    }
    if (!names.empty() && !units.empty()) break;
  }

  std::vector<ColumnLabel> labels(dialect.numeric.size());
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (c < names.size()) labels[c] = read_label(base::printable(names[c]));
    if (labels[c].unit || c >= units.size()) continue;
    labels[c].unit = unit_in(units[c]);
    time_suffix(labels[c]);
  }
  return labels;
}

}  // namespace stillmass::recording
