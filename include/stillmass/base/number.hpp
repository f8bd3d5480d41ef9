#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace stillmass::base {

/// The number that the whole text spells (decimal point, optional sign and exponent; blanks around it allowed),
/// whatever the locale; nothing for anything else. "inf" and "nan" are not numbers here.
std::optional<double> parse_number(std::string_view text);
std::optional<std::int64_t> parse_integer(std::string_view text);

/// Shortest text that reads back as the same double. NaN and infinity give "null".
std::string shortest(double value);

/// For people: `digits` significant digits, no exponent for ordinary sizes ("0.0123", "24.6", "1478").
std::string rounded(double value, int digits = 3);
/// The same without zeros at the end behind the point: "2048", "0.5", for numbers that are set, not measured.
std::string plain(double value, int digits = 6);

}  // namespace stillmass::base
