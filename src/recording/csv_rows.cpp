#include "recording/csv_rows.hpp"

#include <algorithm>

#include "stillmass/base/error.hpp"

namespace stillmass::recording {

CsvRows::CsvRows(std::shared_ptr<const CsvSource> source)
    : source_(std::move(source)),
      parser_(source_->table),
      blocks_(source_->text, source_->table.decimal == ',' && source_->table.separator != ','),
      scratch_(source_->table.channels.size()) {}

void CsvRows::seek(std::int64_t row) {
  if (row == at_) return;
  const auto& marks = source_->scan.marks;
  const auto after = std::upper_bound(marks.begin(), marks.end(), row,
                                      [](std::int64_t wanted, const RowMark& mark) { return wanted < mark.row; });
  const RowMark& mark = *std::prev(after);
  const bool ahead_and_near = at_ >= mark.row && at_ < row;
  if (!ahead_and_near) {
    blocks_.seek(mark.offset);
    next_ = end_ = nullptr;
    at_ = mark.row;
  }
  for (; at_ < row; ++at_) read_row(scratch_.data(), 1, counts_by_time());
}

// Where rows lost their time, only a look at the time tells whether a line counts.
bool CsvRows::counts_by_time() const { return source_->scan.look_at_times; }

void CsvRows::read_row(double* values, std::size_t stride, bool with_time) {
  while (true) {
    if (next_ == end_) {
      const std::string_view block = blocks_.next();
      if (block.empty()) {
        throw base::file_error(source_->text.file().name(), "changed while it was read", "wait until it is complete");
      }
      next_ = block.data();
      end_ = block.data() + block.size();
    }
    const bool row =
        with_time ? parser_.read_with_time(next_, end_, values, stride) : parser_.read(next_, end_, values, stride);
    if (row) return;
  }
}

void CsvRows::read(std::size_t count, double* values, std::size_t stride, double* times, std::vector<Bad>& bad) {
  const bool with_time = times != nullptr || counts_by_time();
  for (std::size_t i = 0; i < count; ++i) {
    read_row(values + i, stride, with_time);
    if (times != nullptr) times[i] = parser_.time_s();
    for (const RowParser::BadCell& cell : parser_.bad_cells())
      bad.push_back({static_cast<std::size_t>(cell.channel), i});
  }
  at_ += static_cast<std::int64_t>(count);
}

}  // namespace stillmass::recording
