#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/recording/text_options.hpp"

#include "recording/csv_column.hpp"
#include "recording/text_source.hpp"
#include "recording/timestamp.hpp"

namespace stillmass::recording {

/// How a text file writes a table of numbers, recognised from its beginning.
struct CsvDialect {
  char separator = ',';  ///< ' ' stands for runs of blanks and tabs
  char decimal = '.';
  bool quoted = false;  ///< cells of the rows stand within quotes
  DateOrder date_order = DateOrder::day_first;
  std::vector<bool> numeric;        ///< for each column: numbers (or times) stand in it
  std::vector<std::string> header;  ///< the lines above the first row
  std::int64_t data_offset = 0;     ///< of the first row, in the text
  std::vector<std::string> rows;    ///< the first rows, for a look at what they hold
  std::vector<CsvColumn> columns;   ///< the same by columns
};

/// What the user says is taken as said, the rest recognised. Throws `Error` (file) where no table of numbers is found,
/// or where a comma, a point or a date can be read in two ways, so that a guess would change the numbers.
CsvDialect recognise_dialect(const TextSource& text, const TextOptions& options);

}  // namespace stillmass::recording
