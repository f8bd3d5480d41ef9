#pragma once

#include <optional>
#include <string_view>

namespace stillmass::recording {

/// How a text file writes its table, where the user knows better than what is recognised. Sound files need none of it.
struct TextOptions {
  std::optional<char> separator;  ///< ',', ';', '\t', or ' ' for runs of blanks
  std::optional<char> decimal;    ///< '.' or ','
  std::optional<double> time_unit_s;
  std::optional<int> time_column;  ///< 1-based, every column counted; 0: no column is time
  std::optional<bool> day_first;   ///< of dates such as 03/04/2024
};

/// The words for these, as options and survey files write them; nothing for another word.
std::optional<char> separator_named(std::string_view word);    ///< comma, semicolon, tab, blanks
std::optional<char> decimal_named(std::string_view word);      ///< point, comma
std::optional<double> time_unit_named(std::string_view word);  ///< s, ms, us, ns, min, h, d
std::optional<bool> day_first_named(std::string_view word);    ///< day-first, month-first

std::string_view separator_name(char separator);
std::string_view decimal_name(char decimal);
std::string_view time_unit_name(double unit_s);

}  // namespace stillmass::recording
