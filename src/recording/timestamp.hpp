#pragma once

#include <limits>
#include <optional>
#include <string_view>

namespace stillmass::recording {

/// Which comes first in "03/04/2024".
enum class DateOrder { day_first, month_first };

/// Seconds spelled by a clock time (from midnight) or by a date and a clock time (from 1970, UTC where an offset is
/// given). Clock: "HH:MM:SS[.fraction]", the fraction behind a point, a comma or a third colon, AM or PM behind it;
/// "MM:SS.fraction" as spreadsheets show it. Date: "2024-02-28" (also '/', '.'; ISO 8601), "28.02.2024", "28-Feb-2024",
/// and in the given order "28/02/2024" or "28-02-2024"; years of two digits are those from 1970 to 2069. Between date
/// and clock 'T', '_', a comma or blanks; behind it 'Z', "UTC", "GMT" or an offset "+02:00". Nothing for anything else.
std::optional<double> parse_timestamp(std::string_view text, DateOrder order = DateOrder::day_first);

/// What a date with its year last says of the order of day and month.
enum class OrderEvidence { none, either, day_first, month_first };
OrderEvidence order_evidence(std::string_view timestamp);

/// The date of a time stamp as written; empty where it has none.
std::string_view date_part(std::string_view timestamp);

/// Digits behind the seconds of a time stamp.
int fraction_digits(std::string_view timestamp);

/// How the stamps of one table are read.
struct StampReading {
  DateOrder order = DateOrder::day_first;
  /// Clock times without a date below this belong to the next day.
  double next_day_below_s = -std::numeric_limits<double>::infinity();

  std::optional<double> seconds(std::string_view text) const;
  /// For a recording that begins at that clock time: it may last for 22 hours.
  void begin_at(double clock_s) { next_day_below_s = clock_s - 2.0 * 3600.0; }
};

}  // namespace stillmass::recording
