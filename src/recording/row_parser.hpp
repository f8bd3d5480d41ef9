#pragma once

#include <cstddef>
#include <cstdint>
#include <string_view>
#include <vector>

#include "recording/csv_cell.hpp"
#include "recording/csv_table.hpp"

namespace stillmass::recording {

/// Reads the rows of a text table, one line at a time: quickly where a line is as it should be, with care where not.
class RowParser {
 public:
  /// A cell of a channel that holds no number.
  struct BadCell {
    int channel = 0;
    CellKind kind = CellKind::empty;  ///< empty or not_a_number
  };

  /// Lines come with decimal points (LineBlocks turns commas), except those with quotes between commas.
  explicit RowParser(const CsvTable& table);

  /// Reads the line at `at`, within a block closed by '\n', and moves `at` to the next line. Writes channel c to
  /// values[c * stride]. False: the line is not a row (blank, a comment, a row without its time).
  bool read(const char*& at, const char* end, double* values, std::size_t stride);
  /// Like `read`, and leaves the time in `time_s`.
  bool read_with_time(const char*& at, const char* end, double* values, std::size_t stride);
  /// Reads the time alone; the rest of the line must be known to be good. False: not readable that way.
  bool read_time(const char*& at, const char* end);

  double time_s() const { return time_s_; }
  /// Of the row read last; in it the value is 0.
  const std::vector<BadCell>& bad_cells() const { return bad_; }
  /// The line read last was no row but held numbers: a row that lost its time.
  bool lost_time() const { return lost_time_; }

 private:
  template <bool with_time>
  bool read_line(const char*& at, const char* end, double* values, std::size_t stride);
  template <bool with_time>
  bool read_fast(const char*& at, const char* end, double* values, std::size_t stride);
  bool read_slowly(std::string_view line, double* values, std::size_t stride);
  bool is_padding(char c) const;
  bool number(const char*& at, const char* end, double& value) const;
  bool time_cell(const char*& at, const char* end);
  bool to_next_cell(const char*& at) const;

  const CsvTable* table_;
  char separator_;
  bool blank_separated_;
  char decimal_;
  std::vector<std::string_view> cells_;
  std::vector<BadCell> bad_;
  double time_s_ = 0.0;
  bool lost_time_ = false;
};

}  // namespace stillmass::recording
