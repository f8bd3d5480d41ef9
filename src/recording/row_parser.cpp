#include "recording/row_parser.hpp"

#include <algorithm>
#include <cstring>

#include "recording/decimal.hpp"
#include "recording/timestamp.hpp"

namespace stillmass::recording {
namespace {

const char* line_end(const char* at, const char* end) {
  return static_cast<const char*>(std::memchr(at, '\n', static_cast<std::size_t>(end - at)));
}

bool is_blank(char c) { return c == ' ' || c == '\t'; }

// Nothing but signs, digits and separators: such a line counts as a row even if no cell of it is a number, because the
// scan of the file counts it without looking into its cells.
bool looks_numeric(std::string_view line) {
  return std::all_of(line.begin(), line.end(), [](char c) {
    return (c >= '+' && c <= ';') || c == 'e' || c == 'E' || c == ' ' || c == '\t' || c == '\r';
  });
}

}  // namespace

RowParser::RowParser(const CsvTable& table)
    : table_(&table),
      separator_(table.separator),
      blank_separated_(table.separator == ' '),
      decimal_(table.decimal == ',' && table.separator == ',' ? ',' : '.') {}

// A blank that is not the end of a cell.
inline bool RowParser::is_padding(char c) const { return is_blank(c) && (c != separator_ || blank_separated_); }

// From behind one cell to the first character of the next; false where there is none or something else stands there.
inline bool RowParser::to_next_cell(const char*& at) const {
  if (blank_separated_) {
    if (!is_blank(*at)) return false;
  } else {
    while (is_padding(*at)) ++at;
    if (*at != separator_) return false;
    ++at;
  }
  while (is_padding(*at)) ++at;
  return true;
}

inline bool RowParser::number(const char*& at, const char* end, double& value) const {
  if (*at == '+') ++at;
  const char* const stop = read_decimal(at, end, value);
  if (stop == nullptr) return false;
  at = stop;
  return true;
}

bool RowParser::time_cell(const char*& at, const char* end) {
  double value = 0.0;
  if (table_->time_is_stamp) {
    const char* stop = at;
    while (*stop != separator_ && *stop != '\n' && *stop != '\r') ++stop;
    const auto stamp = table_->stamps.seconds({at, static_cast<std::size_t>(stop - at)});
    if (!stamp) return false;
    value = *stamp;
    at = stop;
  } else if (!number(at, end, value)) {
    return false;
  }
  time_s_ = value * table_->time_to_s;
  return true;
}

template <bool with_time>
bool RowParser::read_fast(const char*& at, const char* end, double* values, std::size_t stride) {
  const std::size_t count = table_->targets.size();
  while (is_padding(*at)) ++at;
  if (*at == '#' || *at == '%') return false;
  for (std::size_t field = 0; field < count; ++field) {
    const int target = table_->targets[field];
    if (target >= 0) {
      if (!number(at, end, values[static_cast<std::size_t>(target) * stride])) return false;
    } else if (with_time && target == CsvTable::time) {
      if (!time_cell(at, end)) return false;
    } else if (blank_separated_) {
      while (!is_blank(*at) && *at != '\n') ++at;
    } else {
      while (*at != separator_ && *at != '\n') ++at;
    }
    if (field + 1 < count && !to_next_cell(at)) return false;
  }
  // Behind the last number its cell must end.
  const bool blank_follows = is_blank(*at);
  while (is_padding(*at)) ++at;
  if (*at == '\r') ++at;
  if (*at == '\n') return true;
  return blank_separated_ ? blank_follows : *at == separator_;
}

bool RowParser::read_slowly(std::string_view line, double* values, std::size_t stride) {
  if (is_blank_or_comment(line)) return false;
  split_cells(line, separator_, cells_);
  bool timed = !table_->has_time;
  std::size_t numbers = 0;
  std::size_t texts = 0;
  for (std::size_t field = 0; field < table_->targets.size(); ++field) {
    const int target = table_->targets[field];
    if (target == CsvTable::skip) continue;
    const Cell cell = field < cells_.size() ? read_cell(cells_[field], decimal_) : Cell{};
    if (target == CsvTable::time) {
      timed = cell.kind == (table_->time_is_stamp ? CellKind::time : CellKind::number);
      time_s_ = cell.value * table_->time_to_s;
      if (timed && table_->time_is_stamp) time_s_ = table_->stamps.seconds(bare(cells_[field])).value_or(0.0);
      continue;
    }
    const bool good = cell.kind == CellKind::number;
    numbers += good || cell.kind == CellKind::not_a_number ? 1 : 0;
    texts += cell.kind == CellKind::text ? 1 : 0;
    values[static_cast<std::size_t>(target) * stride] = good ? cell.value : 0.0;
    if (!good) {
      const auto kind = cell.kind == CellKind::not_a_number ? CellKind::not_a_number : CellKind::empty;
      bad_.push_back({target, kind});
    }
  }
  lost_time_ = !timed && numbers > 0;
  if (table_->has_time) return timed;
  return numbers > 0 || texts == 0 || looks_numeric(line);
}

template <bool with_time>
bool RowParser::read_line(const char*& at, const char* end, double* values, std::size_t stride) {
  bad_.clear();
  lost_time_ = false;
  const char* const begin = at;
  if (!table_->quoted && read_fast<with_time>(at, end, values, stride)) {
    at = (*at == '\n' ? at : line_end(at, end)) + 1;
    return true;
  }
  const char* const stop = line_end(begin, end);
  at = stop + 1;
  return read_slowly({begin, static_cast<std::size_t>(stop - begin)}, values, stride);
}

bool RowParser::read(const char*& at, const char* end, double* values, std::size_t stride) {
  return read_line<false>(at, end, values, stride);
}

bool RowParser::read_with_time(const char*& at, const char* end, double* values, std::size_t stride) {
  return read_line<true>(at, end, values, stride);
}

bool RowParser::read_time(const char*& at, const char* end) {
  const char* cell = at;
  while (is_padding(*cell)) ++cell;
  for (std::size_t field = 0; table_->targets[field] != CsvTable::time; ++field) {
    while (*cell != '\n' && (blank_separated_ ? !is_blank(*cell) : *cell != separator_)) ++cell;
    if (!to_next_cell(cell)) return false;
  }
  if (!time_cell(cell, end)) return false;
  if (!blank_separated_) {
    while (is_padding(*cell)) ++cell;
  }
  if (*cell != separator_ && !(blank_separated_ && is_blank(*cell)) && *cell != '\r' && *cell != '\n') return false;
  at = line_end(cell, end) + 1;
  return true;
}

}  // namespace stillmass::recording
