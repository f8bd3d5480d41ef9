#include "recording/timestamp.hpp"

#include <charconv>
#include <chrono>

#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

// Eats a number of `least` to `most` digits from the front.
std::optional<int> digits(std::string_view& text, std::size_t least, std::size_t most) {
  std::size_t count = 0;
  while (count < most && count < text.size() && text[count] >= '0' && text[count] <= '9') ++count;
  if (count < least) return {};
  int value = 0;
  std::from_chars(text.data(), text.data() + count, value);
  text.remove_prefix(count);
  return value;
}

bool eat(std::string_view& text, std::string_view any_of) {
  if (text.empty() || any_of.find(text.front()) == std::string_view::npos) return false;
  text.remove_prefix(1);
  return true;
}

// "SS[.fraction]" up to the end or a 'Z'.
std::optional<double> seconds(std::string_view& text) {
  const auto whole = digits(text, 1, 2);
  if (!whole || *whole > 60) return {};
  double value = *whole;
  if (eat(text, ".,")) {
    double weight = 0.1;
    while (!text.empty() && text.front() >= '0' && text.front() <= '9') {
      value += weight * (text.front() - '0');
      weight *= 0.1;
      text.remove_prefix(1);
    }
  }
  return value;
}

std::optional<double> clock(std::string_view& text, bool needs_seconds) {
  const auto hours = digits(text, 1, 2);
  if (!hours || *hours > 24 || !eat(text, ":")) return {};
  const auto minutes = digits(text, 2, 2);
  if (!minutes || *minutes > 59) return {};
  double value = 3600.0 * *hours + 60.0 * *minutes;
  if (!eat(text, ":")) return needs_seconds ? std::nullopt : std::optional(value);
  const auto rest = seconds(text);
  if (!rest) return {};
  return value + *rest;
}

std::optional<double> date(std::string_view& text) {
  const auto year = digits(text, 4, 4);
  if (!year || !eat(text, "-/")) return {};
  const auto month = digits(text, 1, 2);
  if (!month || !eat(text, "-/")) return {};
  const auto day = digits(text, 1, 2);
  if (!day) return {};
  const std::chrono::year_month_day calendar{std::chrono::year(*year),
                                             std::chrono::month(static_cast<unsigned>(*month)),
                                             std::chrono::day(static_cast<unsigned>(*day))};
  if (!calendar.ok()) return {};
  return 86400.0 * static_cast<double>(std::chrono::sys_days(calendar).time_since_epoch().count());
}

}  // namespace

std::optional<double> parse_timestamp(std::string_view text) {
  text = base::trimmed(text);
  if (text.size() < 5) return {};
  double days = 0.0;
  const bool dated = text[4] == '-' || text[4] == '/';
  if (dated) {
    const auto day = date(text);
    if (!day || !eat(text, "T ")) return {};
    days = *day;
  }
  const auto time = clock(text, !dated);
  eat(text, "Z");
  if (!time || !text.empty()) return {};
  return days + *time;
}

}  // namespace stillmass::recording
