#include "recording/csv_scan.hpp"

#include <algorithm>
#include <cstring>

#include "stillmass/base/error.hpp"

#include "recording/line_blocks.hpp"
#include "recording/row_parser.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t places_listed = 10;

// What a block of lines consists of, counted without telling its lines apart.
struct Census {
  std::size_t lines = 0;
  std::size_t separators = 0;
  std::size_t ended_by_separator = 0;  // lines
  std::size_t odd = 0;                 // bytes of anything but numbers, empty cells, blank lines
};

// Bytes are counted in strips short enough for counters of 8 bits, and without branches: so the compiler turns the loop
// into vector code.
Census census_of(std::string_view block, char separator, bool stamps) {
  constexpr std::size_t strip = 240;
  using Byte = unsigned char;
  const auto* const bytes = reinterpret_cast<const Byte*>(block.data());
  const auto cell_end = static_cast<Byte>(separator);
  const Byte first_letter = stamps ? 'T' : 'E';  // of dates: "2024-05-01T12:00Z"
  const Byte second_letter = stamps ? 'Z' : 'E';
  Census census;
  const bool starts_well = bytes[0] != cell_end && (bytes[0] == ' ' || (bytes[0] >= '+' && bytes[0] <= ';'));
  census.odd = starts_well ? 0 : 1;
  for (std::size_t begin = 1; begin < block.size(); begin += strip) {
    const std::size_t end = std::min(begin + strip, block.size());
    Byte lines = 0;
    Byte separators = 0;
    Byte ended = 0;
    Byte odd = 0;
    for (std::size_t i = begin; i < end; ++i) {
      const Byte c = bytes[i];
      const Byte previous = bytes[i - 1];
      const Byte is_line_end = c == '\n';
      const Byte is_cell_end = c == cell_end;
      const Byte closes_line = static_cast<Byte>(is_line_end + (c == '\r'));
      const Byte after_line = previous == '\n';
      const Byte after_cell = previous == cell_end;
      // Sums, not "or": the compiler would make a bit test of an "or" of comparisons, and no vector code.
      const Byte of_numbers = static_cast<Byte>(c - '+') <= ';' - '+';
      const Byte of_letters = static_cast<Byte>((c == 'e') + (c == 'E') + (c == first_letter) + (c == second_letter));
      const Byte of_blanks = static_cast<Byte>((c == ' ') + (c == '\t'));
      const Byte known = static_cast<Byte>(of_numbers + of_letters + of_blanks + closes_line);
      const Byte unknown = known == 0;
      const Byte empty_line = after_line & static_cast<Byte>(is_cell_end + closes_line);
      lines = static_cast<Byte>(lines + is_line_end);
      separators = static_cast<Byte>(separators + is_cell_end);
      ended = static_cast<Byte>(ended + (after_cell & closes_line));
      odd = static_cast<Byte>(odd | unknown | empty_line | (after_cell & is_cell_end));
    }
    census.lines += lines;
    census.separators += separators;
    census.ended_by_separator += ended;
    census.odd += odd;
  }
  return census;
}

class Scanner {
 public:
  Scanner(const TextSource& text, const CsvTable& table, std::optional<double> rate_hz)
      : text_(text),
        table_(table),
        parser_(table),
        values_(table.channels.size()),
        grid_(table.first_times_s, table.time_resolution_s, table.single_precision),
        step_s_(rate_hz ? 1.0 / *rate_hz : 0.0) {
    scan_.missing.resize(table.channels.size());
    scan_.not_a_number.resize(table.channels.size());
  }

  void take(std::string_view block, std::int64_t offset) {
    if (!(is_plain(block) && take_plain(block, offset))) take_carefully(block, offset);
  }

  CsvScan finish() {
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
      }
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
    return true;
  }

  void take_carefully(std::string_view block, std::int64_t offset) {
    const char* const end = block.data() + block.size();
    for (const char* at = block.data(); at < end;) {
      const std::int64_t start = offset + (at - block.data());
      const bool row = parser_.read_with_time(at, end, values_.data(), 1);
      if (!row) {
        scan_.rows_without_time += parser_.lost_time() ? 1 : 0;
        continue;
      }
      mark(start, parser_.time_s());
      if (table_.has_time) grid_.add(parser_.time_s());
      for (const RowParser::BadCell& bad : parser_.bad_cells()) note(bad);
      ++rows_;
    }
  }

  void mark(std::int64_t offset, double time_s = 0.0) {
    if (rows_ % rows_per_mark != 0) return;
    scan_.marks.push_back({rows_, offset});
    if (table_.has_time) scan_.mark_times.push_back({rows_, time_s});
  }

  void note(const RowParser::BadCell& bad) {
    const auto c = static_cast<std::size_t>(bad.channel);
    BadCells& cells = bad.kind == CellKind::not_a_number ? scan_.not_a_number[c] : scan_.missing[c];
    const double now_s = table_.has_time ? grid_.elapsed_s() : static_cast<double>(rows_) * step_s_;
    if (cells.cells == 0) cells.first_s = now_s;
    cells.last_s = now_s;
    ++cells.cells;
    if (cells.last_row + 1 != rows_) {
      ++cells.places;
      if (cells.first_places_s.size() < places_listed) cells.first_places_s.push_back({now_s, now_s});
    } else if (static_cast<std::size_t>(cells.places) == cells.first_places_s.size()) {
      cells.first_places_s.back()[1] = now_s;
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
  for (std::string_view block = blocks.next(); !block.empty(); block = blocks.next()) {
    context.check_stop();
    scanner.take(block, blocks.offset());
    context.report(what, static_cast<double>(blocks.offset()) / static_cast<double>(text.size()));
  }
  return scanner.finish();
}

}  // namespace stillmass::recording
