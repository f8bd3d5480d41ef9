#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "recording/csv_table.hpp"

namespace stillmass::recording {

/// Lines of text between the rows of a table.
enum class TextBetween {
  text,          ///< a note, damage
  header_again,  ///< the names of the columns once more: the logger was restarted
  other_table,   ///< names of other columns
};

/// next_row: the row behind them; names of other columns are as many as its cells. Commas in the lines may have been
/// turned to points (LineBlocks).
TextBetween kind_of(const std::vector<std::string>& lines, std::string_view next_row, const CsvTable& table);

}  // namespace stillmass::recording
