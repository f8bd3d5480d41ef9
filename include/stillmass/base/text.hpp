#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace stillmass::base {

std::string_view trimmed(std::string_view text);
std::string lower(std::string_view text);  ///< ASCII letters only
std::vector<std::string_view> split(std::string_view text, char separator);
bool is_utf8(std::string_view bytes);
std::string latin1_to_utf8(std::string_view bytes);
/// UTF-16 with a byte order mark removed; odd trailing byte dropped, lone surrogates become U+FFFD.
std::string utf16_to_utf8(std::string_view bytes, bool big_endian);
/// Any text as valid UTF-8 (taken for Latin-1 where it is not) with control characters shown as '?': safe to print.
std::string printable(std::string_view bytes);
/// Letters, digits, '-', '_' and '.' kept, everything else '-'; never empty, never starts with '.'.
std::string safe_file_name(std::string_view name);
/// Of the candidates, the one with the smallest edit distance to `name` if that is close enough to be a slip; else
/// empty.
std::string_view nearest_name(std::string_view name, std::span<const std::string_view> candidates);

}  // namespace stillmass::base
