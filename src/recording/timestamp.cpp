#include "recording/timestamp.hpp"

#include <algorithm>
#include <array>
#include <chrono>
#include <cstdint>
#include <string>

#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

constexpr double day_s = 86400.0;
constexpr auto months = std::to_array<std::string_view>(
    {"jan", "feb", "mar", "apr", "may", "jun", "jul", "aug", "sep", "oct", "nov", "dec"});

bool is_digit(char c) { return c >= '0' && c <= '9'; }

// Eats a number of `least` to `most` digits from the front.
std::optional<int> digits(std::string_view& text, std::size_t least, std::size_t most) {
  std::size_t count = 0;
  int value = 0;
  while (count < most && count < text.size() && is_digit(text[count])) value = 10 * value + (text[count++] - '0');
  if (count < least) return {};
  text.remove_prefix(count);
  return value;
}

bool eat(std::string_view& text, std::string_view any_of) {
  if (text.empty() || any_of.find(text.front()) == std::string_view::npos) return false;
  text.remove_prefix(1);
  return true;
}

// The digits behind the decimal sign; those beyond the eighteenth do not count.
double fraction(std::string_view& text) {
  std::int64_t value = 0;
  double scale = 1.0;
  for (; !text.empty() && is_digit(text.front()); text.remove_prefix(1)) {
    if (scale >= 1e18) continue;
    value = 10 * value + (text.front() - '0');
    scale *= 10.0;
  }
  return static_cast<double>(value) / scale;
}

// "AM" or "PM" behind a clock time; false where the hour does not go with it.
bool half_day(std::string_view& text, double& clock_s) {
  std::string_view rest = base::trimmed(text);
  if (rest.size() < 2 || (rest[1] != 'M' && rest[1] != 'm')) return true;
  const bool afternoon = rest[0] == 'P' || rest[0] == 'p';
  if (!afternoon && rest[0] != 'A' && rest[0] != 'a') return true;
  if (clock_s < 3600.0 || clock_s >= 13.0 * 3600.0) return false;
  if (clock_s >= 12.0 * 3600.0) clock_s -= 12.0 * 3600.0;
  if (afternoon) clock_s += 12.0 * 3600.0;
  text = rest.substr(2);
  return true;
}

std::optional<double> clock(std::string_view& text, bool dated) {
  const auto first = digits(text, 1, 2);
  if (!first || !eat(text, ":")) return {};
  const auto second = digits(text, 2, 2);
  if (!second || *second > 60) return {};
  double value = 0.0;
  if (eat(text, ":")) {
    const auto third = digits(text, 1, 2);
    if (!third || *third > 60 || *first > 24 || *second > 59) return {};
    value = 3600.0 * *first + 60.0 * *second + *third;
    const bool colon_and_digit = text.size() > 1 && text[0] == ':' && is_digit(text[1]);
    if (colon_and_digit || (!text.empty() && text[0] != ':')) {
      if (eat(text, ".,:")) value += fraction(text);
    }
  } else if (!dated && text.size() > 1 && (text[0] == '.' || text[0] == ',') && is_digit(text[1])) {
    text.remove_prefix(1);
    value = 60.0 * *first + *second + fraction(text);  // "MM:SS.fraction"
  } else if (dated && *first <= 24 && *second <= 59) {
    value = 3600.0 * *first + 60.0 * *second;
  } else {
    return {};
  }
  return half_day(text, value) ? std::optional(value) : std::nullopt;
}

// Day, month and year as written: numbers (or a month's name) and the sign between them.
struct WrittenDate {
  std::array<int, 3> part{};
  char sign = '-';
  bool year_first = false;
  bool month_named = false;
  std::size_t length = 0;
};

std::optional<WrittenDate> written_date(std::string_view text) {
  const std::string_view whole = text;
  WrittenDate date;
  const auto first = digits(text, 1, 4);
  if (!first || text.empty()) return {};
  date.year_first = whole.size() - text.size() == 4;
  date.part[0] = *first;
  date.sign = text.front();
  const std::string_view signs = "-/. ";
  if (!eat(text, signs)) return {};
  if (text.size() >= 3 && !is_digit(text.front())) {
    const auto month = std::find(months.begin(), months.end(), base::lower(text.substr(0, 3)));
    if (month == months.end()) return {};
    date.month_named = true;
    date.part[1] = static_cast<int>(month - months.begin()) + 1;
    text.remove_prefix(3);
  } else {
    const auto second = digits(text, 1, 2);
    if (!second || date.sign == ' ') return {};
    date.part[1] = *second;
  }
  if (text.empty() || text.front() != date.sign) return {};
  text.remove_prefix(1);
  const std::size_t before = text.size();
  const auto third = digits(text, 1, date.year_first ? 2 : 4);
  const std::size_t width = before - text.size();
  if (!third || (!date.year_first && width != 2 && width != 4)) return {};
  date.part[2] = *third + (!date.year_first && width == 2 ? (*third < 70 ? 2000 : 1900) : 0);
  date.length = whole.size() - text.size();
  return date;
}

// True where the order of day and month is a matter of country.
bool order_matters(const WrittenDate& date) {
  return !date.year_first && !date.month_named && (date.sign == '/' || date.sign == '-');
}

std::optional<double> days_of(const WrittenDate& date, DateOrder order) {
  const bool swapped = order_matters(date) && order == DateOrder::month_first;
  const int year = date.year_first ? date.part[0] : date.part[2];
  const int month = swapped ? date.part[0] : date.part[1];
  const int day = date.year_first ? date.part[2] : (swapped ? date.part[1] : date.part[0]);
  const std::chrono::year_month_day calendar{std::chrono::year(year), std::chrono::month(static_cast<unsigned>(month)),
                                             std::chrono::day(static_cast<unsigned>(day))};
  if (!calendar.ok()) return {};
  return day_s * static_cast<double>(std::chrono::sys_days(calendar).time_since_epoch().count());
}

// Seconds to add for an offset from UTC at the end; nothing where something else stands there.
std::optional<double> zone(std::string_view text) {
  text = base::trimmed(text);
  if (text.empty() || text == "Z" || text == "UTC" || text == "GMT") return 0.0;
  const bool east = text.front() == '+';
  if (!eat(text, "+-")) return {};
  const auto hours = digits(text, 2, 2);
  if (!hours || *hours > 14) return {};
  eat(text, ":");
  const auto minutes = text.empty() ? std::optional(0) : digits(text, 2, 2);
  if (!minutes || *minutes > 59 || !text.empty()) return {};
  const double offset = 3600.0 * *hours + 60.0 * *minutes;
  return east ? -offset : offset;
}

bool looks_dated(std::string_view text) {
  const auto sign = text.find_first_not_of("0123456789");
  return sign != std::string_view::npos && sign > 0 && text[sign] != ':';
}

}  // namespace

std::optional<double> parse_timestamp(std::string_view text, DateOrder order) {
  text = base::trimmed(text);
  if (text.size() < 6) return {};
  double days = 0.0;
  const bool dated = looks_dated(text);
  if (dated) {
    const auto date = written_date(text);
    if (!date) return {};
    auto day = days_of(*date, order);
    if (!day && order_matters(*date)) {
      day = days_of(*date, order == DateOrder::day_first ? DateOrder::month_first : DateOrder::day_first);
    }
    if (!day) return {};
    days = *day;
    text.remove_prefix(date->length);
    if (!eat(text, "T_, ")) return {};
    text = base::trimmed(text);
  }
  const auto time = clock(text, dated);
  if (!time) return {};
  const auto offset = zone(text);
  if (!offset) return {};
  return days + *time + *offset;
}

OrderEvidence order_evidence(std::string_view timestamp) {
  timestamp = base::trimmed(timestamp);
  const auto date = written_date(timestamp);
  if (!date || !order_matters(*date) || date->part[0] == date->part[1]) return OrderEvidence::none;
  if (date->part[0] > 12) return OrderEvidence::day_first;
  if (date->part[1] > 12) return OrderEvidence::month_first;
  return OrderEvidence::either;
}

std::string_view date_part(std::string_view timestamp) {
  timestamp = base::trimmed(timestamp);
  if (!looks_dated(timestamp)) return {};
  const auto date = written_date(timestamp);
  return date ? timestamp.substr(0, date->length) : std::string_view();
}

int fraction_digits(std::string_view timestamp) {
  timestamp = base::trimmed(timestamp);
  timestamp.remove_prefix(date_part(timestamp).size());
  // Behind the last digits before a sign that begins a fraction: "10:20:30.5", "10:20:30:500", "20:30.5".
  auto at = timestamp.find_first_of(".,");
  if (at == std::string_view::npos || at == 0) {
    at = timestamp.find(':');
    for (int colons = 1; colons < 3 && at != std::string_view::npos; ++colons) at = timestamp.find(':', at + 1);
    if (at == std::string_view::npos || timestamp.find_first_of("+-") < at) return 0;
  }
  const auto end = timestamp.find_first_not_of("0123456789", at + 1);
  return static_cast<int>((end == std::string_view::npos ? timestamp.size() : end) - at - 1);
}

std::optional<double> StampReading::seconds(std::string_view text) const {
  auto time = parse_timestamp(text, order);
  if (time && *time < next_day_below_s && *time < day_s) *time += day_s;
  return time;
}

}  // namespace stillmass::recording
