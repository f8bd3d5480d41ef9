#pragma once

#include <array>
#include <charconv>
#include <cmath>
#include <cstdint>
#include <limits>
#include <system_error>

namespace stillmass::recording {

inline constexpr std::array<double, 2> decimal_sign{1.0, -1.0};
inline constexpr std::array<double, 16> decimal_power{1e0, 1e1, 1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                                                      1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15};

/// Reads a number as std::from_chars does, to the bit, and returns where it ends; nullptr where there is none or where
/// it is not finite. A character that is no part of a number, such as a line end, must stand before `end`.
///
/// Numbers of up to 15 digits without an exponent, which is what recorders write, take a short way: their digits as one
/// whole number, divided by a power of ten. Both are exact as doubles, so the quotient is rounded once, as it must be
/// (Clinger 1990, How to read floating point numbers accurately).
inline const char* read_decimal(const char* at, const char* end, double& value) {
  constexpr std::ptrdiff_t most_digits = 15;
  // The sign goes without a branch: of a vibration it cannot be predicted.
  const auto negative = static_cast<std::size_t>(*at == '-');
  const char* const first = at + negative;
  const char* next = first;
  std::uint64_t whole = 0;
  const auto take_digits = [&] {
    for (unsigned digit = 0; (digit = static_cast<unsigned char>(*next) - unsigned{'0'}) <= 9; ++next)
      whole = whole * 10 + digit;
  };
  take_digits();
  std::ptrdiff_t digits = next - first;
  std::ptrdiff_t places = 0;
  if (*next == '.') {
    const char* const behind_point = ++next;
    take_digits();
    places = next - behind_point;
    digits += places;
  }
  if (digits > 0 && digits <= most_digits && (*next | 0x20) != 'e') {
    value = static_cast<double>(static_cast<std::int64_t>(whole)) * decimal_sign[negative] /
            decimal_power[static_cast<std::size_t>(places)];
    return next;
  }
  const auto [stop, fault] = std::from_chars(at, end, value);
  if (fault != std::errc{} || !(std::abs(value) <= std::numeric_limits<double>::max())) return nullptr;
  return stop;
}

}  // namespace stillmass::recording
