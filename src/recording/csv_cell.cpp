#include "recording/csv_cell.hpp"

#include <algorithm>
#include <array>
#include <string>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

#include "recording/timestamp.hpp"

namespace stillmass::recording {
namespace {

// Words that loggers and spreadsheets write in place of a number, in lower case.
constexpr auto words_for_nothing = std::to_array<std::string_view>(
    {"na",        "n/a",     "n.a.",    "#n/a",     "null",     "none",      "-",         "--",
     "---",       "----",    "?",       "??",       "???",      "*",         "**",        "***",
     "****",      "*****",   "err",     "error",    "ovl",      "ol",        "o.l.",      "ovr",
     "ovld",      "over",    "under",   "overload", "overflow", "underflow", "overrange", "over range",
     "saturated", "clipped", "invalid", "missing",  "lost",     "bad",       "fault",     "no data"});
constexpr auto words_for_nan =
    std::to_array<std::string_view>({"nan", "+nan", "-nan", "inf", "+inf", "-inf", "infinity", "-infinity", "1.#inf",
                                     "-1.#inf", "-1.#ind", "1.#qnan", "#num!", "#div/0!", "#value!"});

template <std::size_t count>
bool among(const std::string& word, const std::array<std::string_view, count>& words) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

}  // namespace

std::string_view bare(std::string_view cell) {
  cell = base::trimmed(cell);
  if (cell.size() >= 2 && cell.front() == '"' && cell.back() == '"')
    cell = base::trimmed(cell.substr(1, cell.size() - 2));
  return cell;
}

Cell read_cell(std::string_view cell, char decimal) {
  cell = bare(cell);
  if (cell.empty()) return {};
  std::string word(cell);
  if (decimal == ',') {
    // A point would be a separator of thousands: such a cell is no number here.
    std::transform(word.begin(), word.end(), word.begin(),
                   [](char c) { return c == ',' ? '.' : (c == '.' ? ' ' : c); });
  }
  if (const auto number = base::parse_number(word)) return {CellKind::number, *number};
  word = base::lower(cell);
  if (among(word, words_for_nothing)) return {};
  if (among(word, words_for_nan)) return {CellKind::not_a_number};
  if (const auto time = parse_timestamp(cell)) return {CellKind::time, *time};
  return {CellKind::text};
}

void split_cells(std::string_view line, char separator, std::vector<std::string_view>& cells) {
  cells.clear();
  if (!line.empty() && line.back() == '\r') line.remove_suffix(1);
  const bool blanks = separator == ' ';
  if (blanks) line = base::trimmed(line);
  std::size_t begin = 0;
  bool quoted = false;
  for (std::size_t i = 0; i < line.size(); ++i) {
    if (line[i] == '"') quoted = !quoted;
    if (quoted) continue;
    if (!blanks && line[i] == separator) {
      cells.push_back(line.substr(begin, i - begin));
      begin = i + 1;
    } else if (blanks && (line[i] == ' ' || line[i] == '\t')) {
      cells.push_back(line.substr(begin, i - begin));
      while (i + 1 < line.size() && (line[i + 1] == ' ' || line[i + 1] == '\t')) ++i;
      begin = i + 1;
    }
  }
  cells.push_back(line.substr(begin));
}

bool is_blank_or_comment(std::string_view line) {
  line = base::trimmed(line);
  return line.empty() || line.front() == '#' || line.front() == '%' || line.starts_with("//");
}

}  // namespace stillmass::recording
