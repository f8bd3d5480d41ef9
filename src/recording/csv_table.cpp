#include "recording/csv_table.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <map>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"
#include "recording/csv_column.hpp"
#include "recording/csv_header.hpp"
#include "recording/csv_time_column.hpp"

namespace stillmass::recording {
namespace {

// Fills in what the printed times show of their resolution.
void read_resolution(const CsvColumn& column, CsvTable& table) {
  const double last_digit = column.last_digit();
  double widest = 0.0;
  bool all_single = true;
  for (const double value : column.values) {
    widest = std::max(widest, std::abs(value));
    all_single = all_single && std::abs(static_cast<double>(static_cast<float>(value)) - value) <= 0.51 * last_digit;
  }
  table.time_resolution_s = last_digit * table.time_to_s;
  table.single_precision =
      all_single && widest * static_cast<double>(std::numeric_limits<float>::epsilon()) > 10.0 * last_digit;
}

Role role_from_name(const std::string& name) {
  const std::string low = base::lower(name);
  for (const char* word : {"tacho", "pulse", "trigger"}) {
    if (low.find(word) != std::string::npos) return Role::tacho;
  }
  for (const char* word : {"force", "hammer"}) {
    if (low.find(word) != std::string::npos) return Role::force;
  }
  return Role::vibration;
}

Channel channel_from(const ColumnLabel& label, std::size_t place) {
  Channel channel;
  channel.index = static_cast<int>(place) + 1;
  channel.name = label.name.empty() ? fmt::format("channel {}", place + 1) : label.name;
  channel.role = role_from_name(channel.name);
  if (label.unit) {
    channel.unit = *label.unit;
    channel.unit_known = true;
  }
  return channel;
}

// A first column of row numbers is not a signal, and none that is named so.
bool is_counter(std::size_t field, const std::vector<ColumnLabel>& labels, const CsvDialect& dialect) {
  if (labels[field].is_counter) return column_of(dialect, field).counts();
  return field == 0 && !labels[field].unit && column_of(dialect, field).counts_rows();
}

void place_columns(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels,
                   const std::optional<TimeColumn>& time, CsvTable& table, std::string& left_out) {
  for (std::size_t c = 0; c < labels.size(); ++c) {
    int target = CsvTable::skip;
    const bool before = time && time->other_table && c < time->field;
    const bool more_times =
        time && !before && c != time->field && labels[c].is_time && dialect.numeric[c] && column_of(dialect, c).grows();
    if (time && time->field == c) {
      target = CsvTable::time;
      if (time->other_table) left_out += fmt::format("; columns 1 to {} (another table) left out", c);
    } else if (more_times && c > time->field && !table.channels.empty()) {
      left_out +=
          fmt::format("; columns from {} on (a second table) left out, --time-column {} reads it", c + 1, c + 1);
      break;
    } else if (before) {
      target = CsvTable::skip;
    } else if (!dialect.numeric[c]) {
      if (!labels[c].name.empty()) left_out += fmt::format("; column {} (no numbers) left out", c + 1);
    } else if (is_counter(c, labels, dialect)) {
      left_out += fmt::format("; column {} (row numbers) left out", c + 1);
    } else if (more_times || (!time && labels[c].is_time) || column_of(dialect, c).stamps) {
      left_out += fmt::format("; column {} (times) left out", c + 1);
    } else {
      target = static_cast<int>(table.channels.size());
      table.channels.push_back(channel_from(labels[c], table.channels.size()));
    }
    table.targets.push_back(target);
  }
  while (!table.targets.empty() && table.targets.back() == CsvTable::skip) table.targets.pop_back();
}

[[noreturn]] void refuse_without_rate(const std::vector<ColumnLabel>& labels, const CsvDialect& dialect,
                                      const std::string& where) {
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (!labels[c].is_time || !dialect.numeric[c]) continue;
    const CsvColumn& column = column_of(dialect, c);
    const char* what = !column.moves() ? "stand still" : (column.runs_back() ? "run backwards" : "run back and forth");
    throw base::file_error(where, fmt::format("the times in column {} {}", c + 1, what),
                           "export it with times that go on, or give the sampling rate with --rate HZ");
  }
  throw base::usage_error(where, "has no column of times", "give the sampling rate with --rate HZ");
}

// Cells of most rows, or of a header line that has more.
std::size_t usual_cells(const CsvDialect& dialect) {
  std::map<std::size_t, std::size_t> times;
  std::vector<std::string_view> cells;
  const auto count = [&](const std::string& line) {
    split_cells(line, dialect.separator, cells);
    while (!cells.empty() && bare(cells.back()).empty()) cells.pop_back();
    return cells.size();
  };
  for (const std::string& row : dialect.rows) ++times[count(row)];
  const auto most =
      std::max_element(times.begin(), times.end(), [](const auto& a, const auto& b) { return a.second < b.second; });
  std::size_t usual = most == times.end() ? 0 : most->first;
  for (const std::string& line : dialect.header) usual = std::max(usual, count(line));
  return std::max(usual, dialect.numeric.size());
}

}  // namespace

CsvTable describe_table(const CsvDialect& dialect, const TextSource& text, const OpenOptions& options) {
  const std::string& where = text.file().name();
  const std::vector<ColumnLabel> labels = read_header(dialect, text);
  CsvTable table;
  table.separator = dialect.separator;
  table.decimal = dialect.decimal;
  table.quoted = dialect.quoted;
  table.data_offset = dialect.data_offset;
  table.header = dialect.header;
  table.cells = usual_cells(dialect);
  table.format =
      fmt::format("CSV: {}, decimal {}, {} header line{}", separator_name(dialect.separator),
                  decimal_name(dialect.decimal), dialect.header.size(), dialect.header.size() == 1 ? "" : "s");

  const std::optional<TimeColumn> time = find_time_column(dialect, labels, options, where);
  std::string left_out;
  place_columns(dialect, labels, time, table, left_out);
  if (!time && !options.rate_hz) refuse_without_rate(labels, dialect, where);
  if (table.channels.empty()) {
    throw base::file_error(where, "has no column of samples beside the time", "export the signals with the time");
  }
  if (time) {
    table.has_time = true;
    table.time_is_stamp = time->column.stamps;
    table.time_is_count = time->counts;
    table.stamps = time->column.reading;
    table.time_to_s = time->to_s;
    read_resolution(time->column, table);
    for (const double value : time->column.values) table.first_times_s.push_back(value * time->to_s);
  }
  table.format += ", " + (time ? time->text : std::string("no times")) + left_out;
  return table;
}

}  // namespace stillmass::recording
