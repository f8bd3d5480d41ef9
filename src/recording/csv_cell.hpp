#pragma once

#include <string_view>
#include <vector>

namespace stillmass::recording {

enum class CellKind {
  number,
  time,          ///< a date and time, or a time of day
  empty,         ///< nothing, or a word that stands for nothing ("NA", "---")
  not_a_number,  ///< "NaN", "inf", ...
  text,
};

struct Cell {
  CellKind kind = CellKind::empty;
  double value = 0.0;  ///< of a number or a time (s)
};

/// What a cell holds, blanks and quotes around it left out.
Cell read_cell(std::string_view cell, char decimal);
/// The cell without blanks and quotes around it.
std::string_view bare(std::string_view cell);

/// The cells of a line (without its end). Separator ' ' stands for any run of blanks and tabs. Separators within double
/// quotes do not count. `cells` is overwritten.
void split_cells(std::string_view line, char separator, std::vector<std::string_view>& cells);

/// True for a line that holds no samples by its looks: blank, or a comment that starts with '#', '%' or "//".
bool is_blank_or_comment(std::string_view line);

}  // namespace stillmass::recording
