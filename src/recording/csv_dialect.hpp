#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "recording/text_source.hpp"

namespace stillmass::recording {

/// How a text file writes a table of numbers, recognised from its beginning.
struct CsvDialect {
  char separator = ',';  ///< ' ' stands for runs of blanks and tabs
  char decimal = '.';
  bool quoted = false;              ///< cells of the rows stand within quotes
  std::vector<bool> numeric;        ///< for each column: numbers (or times) stand in it
  std::vector<std::string> header;  ///< the lines above the first row
  std::int64_t data_offset = 0;     ///< of the first row, in the text
  std::vector<std::string> rows;    ///< the first rows, for a look at what they hold
};

/// Throws `Error` (file) where no table of numbers is found, or where a comma may be a decimal sign as well as a
/// separator, so that a guess would change the numbers.
CsvDialect recognise_dialect(const TextSource& text);

/// "tab", "semicolon", "comma", "blanks".
std::string_view separator_name(char separator);

}  // namespace stillmass::recording
