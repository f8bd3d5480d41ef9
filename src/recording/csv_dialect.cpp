#include "recording/csv_dialect.hpp"

#include <algorithm>
#include <array>
#include <map>
#include <optional>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_ambiguity.hpp"
#include "recording/csv_cell.hpp"
#include "recording/csv_dates.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t lines_looked_at = 250;
constexpr auto probe_sizes = std::to_array<std::size_t>({64 * 1024, 1024 * 1024, 8 * 1024 * 1024});
constexpr double fitting_share = 0.8;  // of the lines that follow the first row
constexpr std::size_t following_lines = 10;
constexpr double sparse_share = 0.05;  // a column that is mostly empty but holds so many numbers is one of numbers

struct Way {
  char separator;
  char decimal;
};
// In order of preference where two explain the text equally well.
constexpr auto ways = std::to_array<Way>(
    {{'\t', '.'}, {'\t', ','}, {';', '.'}, {';', ','}, {',', '.'}, {',', ','}, {' ', '.'}, {' ', ','}});

struct Line {
  std::string_view text;
  std::size_t offset = 0;
};

// One letter a cell: 'n' number, 't' text, 'e' empty; without the empty cells at the end.
std::string signature_of(std::string_view line, const Way& way, std::vector<std::string_view>& cells) {
  split_cells(line, way.separator, cells);
  std::string letters;
  for (const std::string_view cell : cells) {
    const CellKind kind = read_cell(cell, way.decimal).kind;
    // Numbers that are refused for how they are written are numbers here, so that the refusal says so.
    const bool text = kind == CellKind::text && !is_grouped_number(cell) && !has_typeset_minus(cell, way.decimal);
    letters.push_back(kind == CellKind::empty ? 'e' : (text ? 't' : 'n'));
  }
  letters.erase(letters.find_last_not_of('e') + 1);
  return letters;
}

long count(std::string_view letters, char letter) { return std::count(letters.begin(), letters.end(), letter); }

// A reading of the text in one way: which cells the rows have.
struct Reading {
  Way way{};
  std::vector<std::string> signatures;  // of each line
  std::string row;                      // signature of most rows
  long score = 0;                       // numbers less texts in the rows like that
};

Reading read_in(const std::vector<Line>& lines, const Way& way) {
  Reading reading;
  reading.way = way;
  std::vector<std::string_view> cells;
  std::map<std::string, long> rows;
  for (const Line& line : lines) {
    const bool comment =
        is_blank_or_comment(line.text) || (way.separator != ';' && base::trimmed(line.text).starts_with(';'));
    reading.signatures.push_back(comment ? "" : signature_of(line.text, way, cells));
    ++rows[reading.signatures.back()];
  }
  for (const auto& [letters, times] : rows) {
    const long score = times < 2 ? 0 : times * (count(letters, 'n') - count(letters, 't'));
    if (score > reading.score) {
      reading.score = score;
      reading.row = letters;
    }
  }
  return reading;
}

// A line that reads like most rows, some cells empty.
bool fits(std::string_view letters, std::string_view row) {
  long numbers = 0;
  for (std::size_t i = 0; i < row.size(); ++i) {
    const char letter = i < letters.size() ? letters[i] : 'e';
    if (row[i] != 'n') continue;
    if (letter == 't') return false;
    numbers += letter == 'n' ? 1 : 0;
  }
  return numbers > 0 && 2 * numbers >= count(row, 'n');
}

std::optional<std::size_t> first_row(const Reading& reading) {
  std::vector<std::size_t> written;  // lines that are not blank
  for (std::size_t i = 0; i < reading.signatures.size(); ++i) {
    if (!reading.signatures[i].empty()) written.push_back(i);
  }
  for (std::size_t i = 0; i < written.size(); ++i) {
    const std::size_t end = std::min(written.size(), i + 1 + following_lines);
    double fitting = 0.0;
    for (std::size_t k = i + 1; k < end; ++k) fitting += fits(reading.signatures[written[k]], reading.row) ? 1.0 : 0.0;
    const bool followed = end > i + 1 && fitting >= fitting_share * static_cast<double>(end - i - 1);
    if (followed && fits(reading.signatures[written[i]], reading.row)) return written[i];
  }
  return {};
}

std::vector<bool> numeric_columns(const Reading& reading, std::size_t first) {
  std::vector<long> numbers;
  std::vector<long> texts;
  long rows = 0;
  for (std::size_t i = first; i < reading.signatures.size(); ++i) {
    const std::string& letters = reading.signatures[i];
    if (!fits(letters, reading.row)) continue;
    ++rows;
    numbers.resize(std::max(numbers.size(), letters.size()));
    texts.resize(numbers.size());
    for (std::size_t c = 0; c < letters.size(); ++c) {
      numbers[c] += letters[c] == 'n' ? 1 : 0;
      texts[c] += letters[c] == 't' ? 1 : 0;
    }
  }
  std::vector<bool> numeric;
  for (std::size_t c = 0; c < numbers.size(); ++c) {
    const bool often = static_cast<double>(numbers[c]) >= sparse_share * static_cast<double>(rows);
    numeric.push_back(numbers[c] > texts[c] && often);
  }
  while (!numeric.empty() && !numeric.back()) numeric.pop_back();
  return numeric;
}

// The line in which names of other columns stand between rows of different length: two tables in one file.
std::optional<std::size_t> next_table(const Reading& reading, std::size_t first) {
  const auto is_row = [](const std::string& letters) { return count(letters, 'n') > 0; };
  std::size_t row_before = first;
  std::optional<std::size_t> names;
  for (std::size_t i = first; i < reading.signatures.size(); ++i) {
    const std::string& letters = reading.signatures[i];
    if (letters.empty()) continue;
    if (is_row(letters)) {
      if (names && letters.size() != reading.signatures[row_before].size()) return names;
      names.reset();
      row_before = i;
    } else if (count(letters, 't') >= 2) {
      names = i;
    }
  }
  return {};
}

std::vector<Line> lines_of(std::string_view probe, bool whole_text) {
  std::vector<Line> lines;
  std::size_t begin = 0;
  while (begin < probe.size()) {
    const auto end = probe.find('\n', begin);
    if (end == std::string_view::npos && !whole_text) break;
    lines.push_back({probe.substr(begin, end == std::string_view::npos ? end : end - begin), begin});
    begin = end == std::string_view::npos ? probe.size() : end + 1;
  }
  return lines;
}

// The user's word goes first; commas alone can be both only within quotes.
bool possible(const Way& way, const TextOptions& options, bool quotes) {
  if (options.separator && *options.separator != way.separator) return false;
  if (options.decimal && *options.decimal != way.decimal) return false;
  return way.separator != ',' || way.decimal != ',' || quotes;
}

std::optional<CsvDialect> recognise(std::string_view probe, bool whole_text, const TextOptions& options) {
  const std::vector<Line> lines = lines_of(probe, whole_text);
  // Of a long header the end matters, of a long table any part: look at the last lines.
  const std::size_t skipped = lines.size() > lines_looked_at ? lines.size() - lines_looked_at : 0;
  const std::vector<Line> looked_at(lines.begin() + static_cast<std::ptrdiff_t>(skipped), lines.end());
  Reading best;
  for (const Way& way : ways) {
    if (!possible(way, options, probe.find('"') != std::string_view::npos)) continue;
    Reading reading = read_in(looked_at, way);
    if (reading.score > best.score) best = std::move(reading);
  }
  if (best.score <= 0) return {};

  const Reading whole = skipped == 0 ? best : [&] {
    Reading all = read_in(lines, best.way);
    all.row = best.row;
    return all;
  }();
  auto first = first_row(whole);
  if (!first) return {};
  while (const auto other = next_table(whole, *first)) {
    const auto rows =
        static_cast<std::size_t>(std::count_if(whole.signatures.begin() + static_cast<std::ptrdiff_t>(*first),
                                               whole.signatures.begin() + static_cast<std::ptrdiff_t>(*other),
                                               [&](const std::string& letters) { return fits(letters, whole.row); }));
    // A few rows of numbers above the table belong to its header; a table that follows the first one does not count.
    if (rows >= following_lines) return recognise(probe.substr(0, lines[*other].offset), true, options);
    first = other;
    while (*first < lines.size() && !fits(whole.signatures[*first], whole.row)) ++*first;
    if (*first == lines.size()) return {};
  }

  CsvDialect dialect;
  dialect.separator = best.way.separator;
  dialect.decimal = best.way.decimal;
  dialect.numeric = numeric_columns(whole, *first);
  dialect.data_offset = static_cast<std::int64_t>(lines[*first].offset);
  for (std::size_t i = 0; i < lines.size(); ++i) {
    if (i < *first) {
      dialect.header.emplace_back(lines[i].text);
    } else if (!whole.signatures[i].empty()) {
      dialect.rows.emplace_back(lines[i].text);
      dialect.quoted = dialect.quoted || lines[i].text.find('"') != std::string_view::npos;
    }
  }
  return dialect;
}

}  // namespace

CsvDialect recognise_dialect(const TextSource& text, const TextOptions& options) {
  std::optional<CsvDialect> dialect;
  for (const std::size_t bytes : probe_sizes) {
    std::string probe(bytes, '\0');
    probe.resize(text.read_at(0, probe.data(), probe.size()));
    const bool whole_text = static_cast<std::int64_t>(probe.size()) >= text.size();
    dialect = recognise(probe, whole_text, options);
    if (dialect || whole_text) break;
  }
  const std::string& name = text.file().name();
  if (!dialect || dialect->numeric.empty()) {
    const bool told = options.separator || options.decimal;
    throw base::file_error(name,
                           std::string("is text without a table of numbers of at least two rows") +
                               (told ? ", written as the options say" : ""),
                           told ? "leave --separator and --decimal out, or check them"
                                : "give one row of samples a line, columns apart by comma, semicolon, tab or blanks");
  }
  refuse_ambiguity(*dialect, options, name);
  settle_date_order(*dialect, text, options);
  dialect->columns = columns_of(*dialect);
  return *dialect;
}

}  // namespace stillmass::recording
