#include "recording/csv_table.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_column.hpp"
#include "recording/csv_header.hpp"

namespace stillmass::recording {
namespace {

constexpr double rate_agreement = 0.05;  // between stated rate and whole-number times in a candidate unit

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

struct TimeUnit {
  double to_s;
  std::string_view name;
};
constexpr auto time_units = std::to_array<TimeUnit>({{1.0, "s"}, {1e-3, "ms"}, {1e-6, "us"}, {1e-9, "ns"}});

// The unit of the times: stated, or s where they have decimals, or the one that gives the stated rate.
TimeUnit time_unit_of(const CsvColumn& column, const ColumnLabel& label, std::optional<double> rate_hz,
                      const std::string& where, std::size_t field) {
  if (column.stamps) return time_units[0];
  if (label.unit && label.unit->quantity == base::Quantity::time) {
    return {label.unit->to_si, label.unit->name};
  }
  if (!column.whole_numbers()) return time_units[0];
  if (rate_hz) {
    const double step = column.median_step();
    for (const TimeUnit& unit : time_units) {
      if (std::abs(step * unit.to_s * *rate_hz - 1.0) <= rate_agreement) return unit;
    }
    throw base::usage_error(where,
                            fmt::format("the times in column {} do not fit a rate of {} Hz in any unit", field + 1,
                                        base::shortest(*rate_hz)),
                            "check --rate");
  }
  throw base::usage_error(where,
                          fmt::format("column {} counts {} a row, in a unit that nothing states", field + 1,
                                      base::shortest(column.median_step())),
                          "give the sampling rate with --rate HZ, or put the unit into the column's name");
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

// Which column is time: named so, or the first one if nothing names it and it grows evenly.
std::optional<std::size_t> time_field(const std::vector<ColumnLabel>& labels, const CsvDialect& dialect) {
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (!dialect.numeric[c]) continue;
    const CsvColumn column = column_of(dialect, c);
    if ((labels[c].is_time || column.stamps) && column.grows()) return c;
  }
  if (!dialect.numeric.front() || labels.front().is_counter || labels.front().unit) return {};
  const CsvColumn first = column_of(dialect, 0);
  return first.grows_evenly() && !first.counts_rows() ? std::optional<std::size_t>(0) : std::nullopt;
}

// A first column of row numbers is not a signal, and none that is named so.
bool is_counter(std::size_t field, const std::vector<ColumnLabel>& labels, const CsvDialect& dialect) {
  const bool suspected = field == 0 ? !labels[field].unit : labels[field].is_counter;
  return suspected && column_of(dialect, field).counts_rows();
}

void place_columns(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels,
                   std::optional<std::size_t> time_at, CsvTable& table, std::string& left_out) {
  for (std::size_t c = 0; c < labels.size(); ++c) {
    int target = CsvTable::skip;
    const bool second_time = time_at && c > *time_at && labels[c].is_time && dialect.numeric[c];
    if (time_at == c) {
      target = CsvTable::time;
    } else if (second_time && column_of(dialect, c).grows()) {
      left_out += fmt::format("; columns from {} on (a second table) left out", c + 1);
      break;
    } else if (!dialect.numeric[c]) {
      if (!labels[c].name.empty()) left_out += fmt::format("; column {} (no numbers) left out", c + 1);
    } else if (is_counter(c, labels, dialect)) {
      left_out += fmt::format("; column {} (row numbers) left out", c + 1);
    } else if (!time_at && labels[c].is_time) {
      left_out += fmt::format("; column {} (times that stand still) left out", c + 1);
    } else {
      target = static_cast<int>(table.channels.size());
      table.channels.push_back(channel_from(labels[c], table.channels.size()));
    }
    table.targets.push_back(target);
  }
  while (!table.targets.empty() && table.targets.back() == CsvTable::skip) table.targets.pop_back();
}

[[noreturn]] void refuse_without_rate(const std::vector<ColumnLabel>& labels, const std::string& where) {
  const auto time = std::find_if(labels.begin(), labels.end(), [](const ColumnLabel& label) { return label.is_time; });
  if (time != labels.end()) {
    throw base::file_error(where, fmt::format("the times in column {} stand still", time - labels.begin() + 1),
                           "export it with times that go on, or give the sampling rate with --rate HZ");
  }
  throw base::usage_error(where, "has no column of times", "give the sampling rate with --rate HZ");
}

}  // namespace

CsvTable describe_table(const CsvDialect& dialect, const TextSource& text, std::optional<double> rate_hz) {
  const std::string& where = text.file().name();
  const std::vector<ColumnLabel> labels = read_header(dialect, text);
  CsvTable table;
  table.separator = dialect.separator;
  table.decimal = dialect.decimal;
  table.quoted = dialect.quoted;
  table.data_offset = dialect.data_offset;
  table.format = fmt::format("CSV: {}, decimal {}, {} header line{}", separator_name(dialect.separator),
                             dialect.decimal == ',' ? "comma" : "point", dialect.header.size(),
                             dialect.header.size() == 1 ? "" : "s");

  const auto time_at = time_field(labels, dialect);
  std::string left_out;
  place_columns(dialect, labels, time_at, table, left_out);
  if (!time_at && !rate_hz) refuse_without_rate(labels, where);
  if (table.channels.empty()) {
    throw base::file_error(where, "has no column of samples beside the time", "export the signals with the time");
  }
  if (time_at) {
    const CsvColumn column = column_of(dialect, *time_at);
    const TimeUnit unit = time_unit_of(column, labels[*time_at], rate_hz, where, *time_at);
    table.has_time = true;
    table.time_is_stamp = column.stamps;
    table.time_to_s = unit.to_s;
    read_resolution(column, table);
    for (const double value : column.values) table.first_times_s.push_back(value * unit.to_s);
    table.format += column.stamps ? fmt::format(", time of day in column {}", *time_at + 1)
                                  : fmt::format(", time in column {} [{}]", *time_at + 1, unit.name);
  } else {
    table.format += ", no times";
  }
  table.format += left_out;
  return table;
}

}  // namespace stillmass::recording
