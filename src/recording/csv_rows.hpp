#pragma once

#include <cstdint>
#include <memory>
#include <vector>

#include "recording/csv_scan.hpp"
#include "recording/csv_table.hpp"
#include "recording/line_blocks.hpp"
#include "recording/row_parser.hpp"
#include "recording/text_source.hpp"

namespace stillmass::recording {

/// What all handles of one text recording share.
struct CsvSource {
  CsvSource(TextSource text_, CsvTable table_, CsvScan scan_)
      : text(std::move(text_)), table(std::move(table_)), scan(std::move(scan_)) {}

  TextSource text;
  CsvTable table;
  CsvScan scan;
};

/// The rows of a text recording by number: second pass over the file.
class CsvRows {
 public:
  /// A channel's value that is no number; row counted from the first row of the call.
  struct Bad {
    std::size_t channel = 0;
    std::size_t row = 0;
  };

  explicit CsvRows(std::shared_ptr<const CsvSource> source);

  void seek(std::int64_t row);
  std::int64_t at() const { return at_; }
  /// Reads the next `count` rows, which must be there: channel c of row i to values[c * stride + i], as stored, 0 where
  /// it is no number. Times (s, as printed) where `times` is given. Throws `Error` (file) where the file has changed.
  void read(std::size_t count, double* values, std::size_t stride, double* times, std::vector<Bad>& bad);

 private:
  bool counts_by_time() const;
  void read_row(double* values, std::size_t stride, bool with_time);

  std::shared_ptr<const CsvSource> source_;
  RowParser parser_;
  LineBlocks blocks_;
  const char* next_ = nullptr;
  const char* end_ = nullptr;
  std::int64_t at_ = -1;
  std::vector<double> scratch_;
};

}  // namespace stillmass::recording
