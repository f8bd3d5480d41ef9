#pragma once

#include <optional>
#include <string_view>

namespace stillmass::recording {

/// Seconds spelled by a clock time "HH:MM:SS[.fraction]" (from midnight) or by a date and a clock time
/// "YYYY-MM-DD HH:MM[:SS[.fraction]]" (from 1970; '/' for '-', 'T' for the blank, a trailing 'Z' allowed; ISO 8601).
/// A decimal comma is taken as well. Nothing for anything else, an offset from UTC included.
std::optional<double> parse_timestamp(std::string_view text);

}  // namespace stillmass::recording
