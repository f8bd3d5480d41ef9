#include "recording/csv_scan.hpp"

#include <algorithm>
#include <cstring>
#include <string>
#include <string_view>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_between.hpp"
#include "recording/csv_census.hpp"
#include "recording/line_blocks.hpp"
#include "recording/row_parser.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t places_listed = 10;
constexpr std::size_t lines_between = 200;

class Scanner {
 public:
  Scanner(const TextSource& text, const CsvTable& table, std::optional<double> rate_hz)
      : text_(text),
        table_(table),
        parser_(table),
        values_(table.channels.size()),
        grid_(table.first_times_s, table.time_resolution_s, table.single_precision),
        step_s_(rate_hz ? 1.0 / *rate_hz : 0.0),
        line_(static_cast<std::int64_t>(table.header.size())) {
    scan_.missing.resize(table.channels.size());
    scan_.not_a_number.resize(table.channels.size());
  }

  void take(std::string_view block, std::int64_t offset) {
    if (!(is_plain(block) && take_plain(block, offset))) take_carefully(block, offset);
  }
  bool ended() const { return scan_.other_table.has_value(); }

  CsvScan finish() {
    if (!between_.empty()) {  // at the end of the file
      count(scan_.texts);
      if (scan_.texts.lines == 1) scan_.texts.first_line = between_line_;
    }
    scan_.rows = rows_;
    if (table_.has_time) {
      scan_.mark_times.push_back({rows_ - 1, grid_.last_s()});
      scan_.grid = grid_.verdict(scan_.mark_times, text_.file().name());
    }
    return std::move(scan_);
  }

 private:
  // Every line has as many cells as the first rows, and nothing but numbers in them.
  bool is_plain(std::string_view block) const {
    if (table_.quoted || table_.separator == ' ') return false;
    const Census census = census_of(block, table_.separator, table_.time_is_stamp);
    if (census.odd != 0) return false;
    const std::size_t cells = table_.targets.size();
    const bool closed = census.ended_by_separator == census.lines;
    if (census.ended_by_separator != 0 && !closed) return false;
    return census.separators == census.lines * (closed ? cells : cells - 1);
  }

  // False, and nothing taken, where a time cannot be read after all.
  bool take_plain(std::string_view block, std::int64_t offset) {
    const char* const end = block.data() + block.size();
    if (!table_.has_time) {
      for (const char* at = block.data(); at < end; ++rows_) {
        mark(offset + (at - block.data()));
        at = static_cast<const char*>(std::memchr(at, '\n', static_cast<std::size_t>(end - at))) + 1;
        ++line_;
      }
      between_.clear();
      return true;
    }
    times_.clear();
    starts_.clear();
    for (const char* at = block.data(); at < end;) {
      starts_.push_back(at - block.data());
      if (!parser_.read_time(at, end)) return false;
      times_.push_back(parser_.time_s());
    }
    for (std::size_t i = 0; i < times_.size(); ++i) {
      mark(offset + starts_[i], times_[i]);
      grid_.add(times_[i]);
      ++rows_;
    }
    line_ += static_cast<std::int64_t>(times_.size());
    between_.clear();
    return true;
  }

  void take_carefully(std::string_view block, std::int64_t offset) {
    const char* const end = block.data() + block.size();
    for (const char* at = block.data(); at < end;) {
      const char* const begin = at;
      const std::int64_t start = offset + (begin - block.data());
      const bool row = parser_.read_with_time(at, end, values_.data(), 1);
      const std::string_view line(begin, static_cast<std::size_t>(at - begin - 1));
      ++line_;
      if (!row) {
        note_no_row(line);
        continue;
      }
      if (!between_.empty() && settle_between(line)) return;
      mark(start, parser_.time_s());
      if (table_.has_time) grid_.add(parser_.time_s());
      if (too_long(line)) count(scan_.too_long);
      for (const RowParser::BadCell& bad : parser_.bad_cells()) note(bad);
      ++rows_;
    }
  }

  void mark(std::int64_t offset, double time_s = 0.0) {
    if (rows_ % rows_per_mark != 0) return;
    scan_.marks.push_back({rows_, offset});
    if (table_.has_time) scan_.mark_times.push_back({rows_, time_s});
  }

  double now_s() const { return table_.has_time ? grid_.elapsed_s() : static_cast<double>(rows_) * step_s_; }

  void count(OddLines& odd) const {
    if (odd.lines == 0) {
      odd.first_line = line_;
      odd.first_s = now_s();
    }
    odd.last_s = now_s();
    ++odd.lines;
  }

  void note_no_row(std::string_view line) {
    scan_.look_at_times = scan_.look_at_times || parser_.lost_time();
    if (parser_.lost_time() && !has_text_for_time(line)) {
      count(scan_.without_time);
    } else if (!is_blank_or_comment(line) && !base::trimmed(line).starts_with(';')) {
      if (between_.empty()) between_line_ = line_;
      if (between_.size() < lines_between) between_.emplace_back(line);
    }
  }

  // "Serial,12": numbers, but a word where the time should stand.
  bool has_text_for_time(std::string_view line) {
    const auto time = std::find(table_.targets.begin(), table_.targets.end(), CsvTable::time);
    const auto field = static_cast<std::size_t>(time - table_.targets.begin());
    split_cells(line, table_.separator, cells_);
    return field < cells_.size() && read_cell(cells_[field], '.').kind == CellKind::text;
  }

  // Lines of text that stood before this row: the header again, the header of another table (true: the rows end here),
  // or something else.
  bool settle_between(std::string_view row) {
    const TextBetween kind = rows_ == 0 ? TextBetween::text : kind_of(between_, row, table_);
    OddLines& odd = kind == TextBetween::header_again ? scan_.headers : scan_.texts;
    if (kind == TextBetween::other_table) {
      scan_.other_table = OddLines{1, between_line_, now_s(), now_s()};
    } else {
      count(odd);
      if (odd.lines == 1) odd.first_line = between_line_;
      if (!table_.has_time && rows_ > 0) scan_.restarts.push_back(rows_);
    }
    between_.clear();
    return kind == TextBetween::other_table;
  }

  bool too_long(std::string_view line) const {
    if (table_.quoted || table_.separator == ' ') return false;
    std::size_t at = 0;
    for (std::size_t cell = 0; cell < table_.cells; ++cell) {
      at = line.find(table_.separator, at);
      if (at == std::string_view::npos) return false;
      ++at;
    }
    const std::string_view rest = line.substr(at);
    return std::any_of(rest.begin(), rest.end(),
                       [&](char c) { return c != table_.separator && c != ' ' && c != '\t' && c != '\r'; });
  }

  void note(const RowParser::BadCell& bad) {
    const auto c = static_cast<std::size_t>(bad.channel);
    BadCells& cells = bad.kind == CellKind::not_a_number ? scan_.not_a_number[c] : scan_.missing[c];
    const double at_s = now_s();
    if (cells.cells == 0) {
      cells.first_s = at_s;
      cells.first_line = line_;
    }
    cells.last_s = at_s;
    ++cells.cells;
    if (cells.last_row + 1 != rows_) {
      ++cells.places;
      if (cells.first_places_s.size() < places_listed) cells.first_places_s.push_back({at_s, at_s});
    } else if (static_cast<std::size_t>(cells.places) == cells.first_places_s.size()) {
      cells.first_places_s.back()[1] = at_s;
    }
    cells.last_row = rows_;
  }

  const TextSource& text_;
  const CsvTable& table_;
  RowParser parser_;
  std::vector<double> values_;
  TimeGrid grid_;
  double step_s_;
  std::int64_t rows_ = 0;
  std::int64_t line_;  // of the file, read last
  std::vector<std::string_view> cells_;
  std::vector<std::string> between_;  // lines of text since the last row
  std::int64_t between_line_ = 0;
  CsvScan scan_;
  std::vector<double> times_;
  std::vector<std::int64_t> starts_;
};

}  // namespace

CsvScan scan_rows(const TextSource& text, const CsvTable& table, std::optional<double> rate_hz,
                  const base::Context& context) {
  Scanner scanner(text, table, rate_hz);
  LineBlocks blocks(text, table.decimal == ',' && table.separator != ',');
  blocks.seek(table.data_offset);
  const std::string what = "looking at " + text.file().name();
  for (std::string_view block = blocks.next(); !block.empty() && !scanner.ended(); block = blocks.next()) {
    context.check_stop();
    scanner.take(block, blocks.offset());
    context.report(what, static_cast<double>(blocks.offset()) / static_cast<double>(text.size()));
  }
  return scanner.finish();
}

}  // namespace stillmass::recording
