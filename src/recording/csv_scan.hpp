#pragma once

#include <array>
#include <cstdint>
#include <memory>
#include <optional>
#include <vector>

#include "stillmass/base/context.hpp"

#include "recording/csv_table.hpp"
#include "recording/text_source.hpp"
#include "recording/time_grid.hpp"

namespace stillmass::recording {

/// Where a row starts in the text.
struct RowMark {
  std::int64_t row = 0;
  std::int64_t offset = 0;
};

/// Cells of one channel without a number, of one kind; places are runs of rows.
struct BadCells {
  std::int64_t cells = 0;
  std::int64_t places = 0;
  std::int64_t last_row = -2;
  std::int64_t first_line = 0;  ///< of the file, from 1
  double first_s = 0.0;
  double last_s = 0.0;
  std::vector<std::array<double, 2>> first_places_s;
};

/// Lines of one kind that do not fit the table.
struct OddLines {
  std::int64_t lines = 0;
  std::int64_t first_line = 0;  ///< of the file, from 1
  double first_s = 0.0;         ///< where it stands among the rows
  double last_s = 0.0;
};

/// What the first pass over a text file finds: everything but the values.
struct CsvScan {
  std::int64_t rows = 0;
  std::vector<RowMark> marks;           ///< every 4096 rows, ascending, from row 0 on
  std::vector<RowTime> mark_times;      ///< stamps of these rows and of the last one; empty without times
  GridVerdict grid;                     ///< of a table with times
  OddLines without_time;                ///< rows left out
  bool look_at_times = false;           ///< only the time tells whether a line is a row
  OddLines texts;                       ///< no rows, no comments
  OddLines headers;                     ///< the header again: the logger was restarted
  OddLines too_long;                    ///< rows with more cells than columns
  std::optional<OddLines> other_table;  ///< the scan ends before it
  std::vector<std::int64_t> restarts;   ///< without times: rows that follow a line of text
  std::vector<BadCells> missing;        ///< per channel
  std::vector<BadCells> not_a_number;   ///< per channel
};

inline constexpr std::int64_t rows_per_mark = 4096;

/// Reads the times and counts the rows; blocks of lines that hold nothing but numbers are not looked at cell by cell.
/// It ends where another table
/// begins. rate_hz: for a table without times. Throws `Error` (file).
CsvScan scan_rows(const TextSource& text, const CsvTable& table, std::optional<double> rate_hz,
                  const base::Context& context);

}  // namespace stillmass::recording
