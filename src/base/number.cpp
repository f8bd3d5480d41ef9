#include "stillmass/base/number.hpp"

#include <array>
#include <charconv>
#include <cmath>
#include <system_error>

#include <fmt/format.h>

#include "stillmass/base/text.hpp"

namespace stillmass::base {
namespace {

template <class T>
std::optional<T> whole(std::string_view text) {
  text = trimmed(text);
  if (text.starts_with('+')) {
    text.remove_prefix(1);
    if (text.starts_with('-')) return {};
  }
  T value{};
  const auto [end, fault] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (fault != std::errc{} || end != text.data() + text.size()) return {};
  return value;
}

}  // namespace

std::optional<double> parse_number(std::string_view text) {
  const auto value = whole<double>(text);
  if (!value || !std::isfinite(*value)) return {};
  return value;
}

std::optional<std::int64_t> parse_integer(std::string_view text) { return whole<std::int64_t>(text); }

std::string shortest(double value) {
  if (!std::isfinite(value)) return "null";
  std::array<char, 32> buffer{};
  const auto result = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value);
  return {buffer.data(), result.ptr};
}

std::string rounded(double value, int digits) {
  if (!std::isfinite(value)) return "-";
  if (value == 0.0) return "0";
  const int exponent = static_cast<int>(std::floor(std::log10(std::abs(value)) + 1e-12));
  if (exponent < -5 || exponent > 9) return fmt::format("{:.{}e}", value, digits - 1);
  const int decimals = digits - 1 - exponent;
  if (decimals <= 0) {
    const double step = std::pow(10.0, -decimals);
    return fmt::format("{:.0f}", std::round(value / step) * step);
  }
  return fmt::format("{:.{}f}", value, decimals);
}

std::string plain(double value, int digits) {
  std::string text = rounded(value, digits);
  if (text.find('.') == std::string::npos || text.find('e') != std::string::npos) return text;
  text.erase(text.find_last_not_of('0') + 1);
  if (text.back() == '.') text.pop_back();
  return text;
}

}  // namespace stillmass::base
