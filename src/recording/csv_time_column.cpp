#include "recording/csv_time_column.hpp"

#include <array>
#include <cmath>
#include <utility>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::recording {
namespace {

constexpr double rate_agreement = 0.05;  // between stated rate and times in a candidate unit
constexpr std::string_view unit_remedy =
    "give its unit with --time-unit or the sampling rate with --rate HZ, or put the unit into the column's name";

struct TimeUnit {
  double to_s;
  std::string text;
};

// Seconds since 1970 of recordings made between 2001 and 2039.
constexpr double epoch_from_s = 1.0e9;
constexpr double epoch_to_s = 2.2e9;

std::optional<TimeUnit> since_1970(const CsvColumn& column) {
  for (const auto& [to_s, name] : {std::pair{1.0, "s"}, {1e-3, "ms"}, {1e-6, "us"}, {1e-9, "ns"}}) {
    const double first = column.values.front() * to_s;
    if (first >= epoch_from_s && first <= epoch_to_s) return TimeUnit{to_s, fmt::format("{} since 1970", name)};
  }
  return {};
}

std::optional<TimeUnit> by_rate(const CsvColumn& column, double rate_hz) {
  for (const auto& [to_s, name] :
       {std::pair{1.0, "s"}, {1e-3, "ms"}, {1e-6, "us"}, {1e-9, "ns"}, {60.0, "min"}, {3600.0, "h"}}) {
    if (std::abs(column.median_step() * to_s * rate_hz - 1.0) <= rate_agreement) {
      return TimeUnit{to_s, fmt::format("{}, from the rate", name)};
    }
  }
  return {};
}

// Days since 1900, as spreadsheets store instants, for the years 1954 to 2119.
bool may_be_days(const CsvColumn& column) {
  constexpr double from_day = 20000.0;
  constexpr double to_day = 80000.0;
  constexpr double longest_step = 1e-3;  // days
  return column.values.front() > from_day && column.values.front() < to_day && column.median_step() < longest_step;
}

TimeUnit unit_of(const CsvColumn& column, const ColumnLabel& label, const OpenOptions& options,
                 const std::string& where, std::size_t field) {
  if (options.text.time_unit_s) {
    return {*options.text.time_unit_s, fmt::format("{}, as stated", time_unit_name(*options.text.time_unit_s))};
  }
  if (label.unit && label.unit->quantity == base::Quantity::time) {
    return {label.unit->to_si, std::string(label.unit->name)};
  }
  if (const auto epoch = since_1970(column)) return *epoch;
  if (options.rate_hz) {
    if (const auto fitting = by_rate(column, *options.rate_hz)) return *fitting;
  }
  // Steps of half a second or more may be seconds of a slow logger or milliseconds of a quick one.
  constexpr double slow_s = 0.45;
  const bool is_quick = column.median_step() < slow_s;
  if (!column.whole_numbers() && is_quick && !may_be_days(column)) return {1.0, "s, assumed"};
  if (!column.whole_numbers() && may_be_days(column)) {
    throw base::usage_error(where, fmt::format("column {} may hold days, as spreadsheets count them", field + 1),
                            "say --time-unit d or --time-unit s; better export it with times in seconds");
  }
  if (options.rate_hz) {
    throw base::usage_error(where,
                            fmt::format("the times in column {} do not fit a rate of {} Hz in any unit", field + 1,
                                        base::shortest(*options.rate_hz)),
                            "check --rate; with --time-column 0 no column counts as time");
  }
  throw base::usage_error(where,
                          fmt::format("column {} counts {} a row, in a unit that nothing states", field + 1,
                                      base::shortest(column.median_step())),
                          std::string(unit_remedy));
}

bool has_times(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels, std::size_t field) {
  if (!dialect.numeric[field]) return false;
  const CsvColumn& column = column_of(dialect, field);
  if (column.values.empty()) return false;
  const bool epoch = field == 0 && !labels[field].unit && column.median_step() > 0.0 && since_1970(column);
  return (labels[field].is_time || column.stamps || epoch) && column.grows();
}

// Of the times that stand before the first signal, the first that goes on with each row: a date and time in whole
// seconds may stand before a finer clock.
std::optional<std::size_t> named_field(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels) {
  std::optional<std::size_t> first;
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (!has_times(dialect, labels, c)) {
      const bool signal = dialect.numeric[c] && !labels[c].is_counter && !labels[c].is_time;
      if (first && signal) break;
      continue;
    }
    if (!column_of(dialect, c).repeats()) return c;
    if (!first) first = c;
  }
  return first;
}

// Row numbers that never run back: lost rows show in them.
std::optional<std::size_t> counting_field(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels) {
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (!dialect.numeric[c] || labels[c].unit) continue;
    const CsvColumn& column = column_of(dialect, c);
    if ((labels[c].is_counter && column.counts() && !column.turns_back()) || (c == 0 && column.counts_rows())) return c;
  }
  return {};
}

std::optional<std::size_t> field_of(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels) {
  if (const auto named = named_field(dialect, labels)) return named;
  if (!dialect.numeric.front() || labels.front().is_counter || labels.front().unit) return {};
  const CsvColumn first = column_of(dialect, 0);
  return first.grows_evenly() && !first.counts_rows() ? std::optional<std::size_t>(0) : std::nullopt;
}

std::size_t stated_field(const CsvDialect& dialect, int column, const std::string& where) {
  const auto field = static_cast<std::size_t>(column - 1);
  const bool there = field < dialect.numeric.size() && dialect.numeric[field];
  if (!there || !column_of(dialect, field).grows()) {
    throw base::usage_error(where, fmt::format("column {} does not hold times that go on", column),
                            "check --time-column; columns are counted from 1, 0 means none");
  }
  return field;
}

// Times before it and signals behind it: the second of two tables side by side.
bool begins_table(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels, std::size_t field) {
  bool times_before = false;
  bool signals_behind = false;
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (c < field) times_before = times_before || has_times(dialect, labels, c);
    if (c > field) signals_behind = signals_behind || (dialect.numeric[c] && !has_times(dialect, labels, c));
  }
  return times_before && signals_behind;
}

std::string stamps_text(const CsvColumn& column, std::size_t field) {
  const std::string& first = column.texts.front();
  if (date_part(first).empty()) return fmt::format("time of day in column {}", field + 1);
  const bool ordered = order_evidence(first) != OrderEvidence::none;
  return fmt::format("date and time in column {}{}", field + 1,
                     !ordered ? "" : (column.reading.order == DateOrder::day_first ? ", day first" : ", month first"));
}

}  // namespace

std::optional<TimeColumn> find_time_column(const CsvDialect& dialect, const std::vector<ColumnLabel>& labels,
                                           const OpenOptions& options, const std::string& where) {
  TimeColumn time;
  const auto stated = options.text.time_column;
  if (stated && *stated == 0) return {};
  auto field = stated ? std::optional(stated_field(dialect, *stated, where)) : field_of(dialect, labels);
  if (!field && options.rate_hz) {
    field = counting_field(dialect, labels);
    time.counts = field.has_value();
  }
  if (!field) return {};
  time.field = *field;
  time.column = column_of(dialect, *field);
  time.other_table = stated && begins_table(dialect, labels, *field);
  if (time.counts) {
    time.to_s = 1.0 / *options.rate_hz;
    time.text = fmt::format("times from the row numbers in column {}", *field + 1);
  } else if (time.column.stamps) {
    time.text = stamps_text(time.column, *field);
  } else {
    const TimeUnit unit = unit_of(time.column, labels[*field], options, where, *field);
    time.to_s = unit.to_s;
    time.text = fmt::format("time in column {} [{}]", *field + 1, unit.text);
  }
  return time;
}

}  // namespace stillmass::recording
