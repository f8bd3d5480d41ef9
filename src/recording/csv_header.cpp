#include "recording/csv_header.hpp"

#include <algorithm>
#include <array>
#include <utility>

#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"

namespace stillmass::recording {
namespace {

// Times and counters as loggers name them in several languages, in lower case.
constexpr auto time_names = std::to_array<std::string_view>(
    {"t",        "x_value",       "x value",   "elapsed",  "elapsed time", "abs time", "absolute time",
     "rel time", "relative time", "date/time", "datetime", "date time",    "zeit",     "uhrzeit",
     "messzeit", "zeitstempel",   "zeitpunkt", "temps",    "tiempo",       "tempo",    "tijd",
     "tid",      "czas",          "aika",      "clock",    "epoch",        "ts",       "timestamp",
     "unix",     "unixtime"});
constexpr auto counter_names = std::to_array<std::string_view>(
    {"index",  "idx",   "sample", "samples", "sample no", "sample no.", "sample number", "sample_number", "no",
     "no.",    "nr",    "nr.",    "#",       "n",         "row",        "count",         "counter",       "scan",
     "record", "point", "seq",    "id",      "messung",   "lfd. nr.",   "lfd.nr."});
constexpr auto detector_words = std::to_array<std::string_view>(
    {"rms", "r.m.s.", "eff", "eff.", "peak", "pk", "0-pk", "0-p", "pp", "p-p", "pk-pk", "peak-peak", "peak-to-peak"});

struct Spelling {
  std::string_view word;
  base::Unit unit;
};
constexpr base::Unit nanosecond{"ns", base::Quantity::time, 1e-9};
constexpr base::Unit microsecond{"us", base::Quantity::time, 1e-6};
constexpr base::Unit millisecond{"ms", base::Quantity::time, 1e-3};
constexpr base::Unit second{"s", base::Quantity::time, 1.0};
constexpr base::Unit minute{"min", base::Quantity::time, 60.0};
constexpr base::Unit hour{"h", base::Quantity::time, 3600.0};

// Units of time beyond those that quantities of a machine have, and words that are name and unit at once.
constexpr auto time_spellings = std::to_array<Spelling>({{"ns", nanosecond},
                                                         {"nsec", nanosecond},
                                                         {"nanoseconds", nanosecond},
                                                         {"us", microsecond},
                                                         {"usec", microsecond},
                                                         {"micros", microsecond},
                                                         {"microseconds", microsecond},
                                                         {"\xc2\xb5s", microsecond},
                                                         {"\xce\xbcs", microsecond},
                                                         {"ms", millisecond},
                                                         {"msec", millisecond},
                                                         {"msecs", millisecond},
                                                         {"millis", millisecond},
                                                         {"milliseconds", millisecond},
                                                         {"millisekunden", millisecond},
                                                         {"s", second},
                                                         {"sec", second},
                                                         {"secs", second},
                                                         {"sek", second},
                                                         {"second", second},
                                                         {"seconds", second},
                                                         {"sekunden", second},
                                                         {"min", minute},
                                                         {"mins", minute},
                                                         {"minute", minute},
                                                         {"minutes", minute},
                                                         {"minuten", minute},
                                                         {"h", hour},
                                                         {"hr", hour},
                                                         {"hrs", hour},
                                                         {"hour", hour},
                                                         {"hours", hour},
                                                         {"stunden", hour}});
// Units behind an underline, where no brackets or powers can be written.
constexpr auto plain_spellings = std::to_array<std::pair<std::string_view, std::string_view>>({{"m_s2", "m/s2"},
                                                                                               {"mps2", "m/s2"},
                                                                                               {"ms2", "m/s2"},
                                                                                               {"mm_s", "mm/s"},
                                                                                               {"mmps", "mm/s"},
                                                                                               {"mms", "mm/s"},
                                                                                               {"m_s", "m/s"},
                                                                                               {"mps", "m/s"},
                                                                                               {"in_s", "in/s"},
                                                                                               {"ips", "in/s"},
                                                                                               {"mg", "mg"},
                                                                                               {"um", "um"},
                                                                                               {"mm", "mm"},
                                                                                               {"mil", "mil"},
                                                                                               {"mils", "mil"},
                                                                                               {"mv", "mV"},
                                                                                               {"kn", "kN"},
                                                                                               {"lbf", "lbf"},
                                                                                               {"rpm", "rpm"}});

template <std::size_t count>
bool among(const std::string& word, const std::array<std::string_view, count>& words) {
  return std::find(words.begin(), words.end(), word) != words.end();
}

std::optional<base::Unit> time_unit_in(std::string_view text) {
  const std::string low = base::lower(base::trimmed(text));
  const auto found = std::find_if(time_spellings.begin(), time_spellings.end(),
                                  [&](const Spelling& each) { return each.word == low; });
  return found == time_spellings.end() ? std::nullopt : std::optional(found->unit);
}

// The text without a word such as "RMS" at its end, which goes to `detector`.
std::string_view without_detector(std::string_view text, std::string_view& detector) {
  const auto blank = text.find_last_of(" ,");
  if (blank == std::string_view::npos || !among(base::lower(text.substr(blank + 1)), detector_words)) return text;
  detector = text.substr(blank + 1);
  return base::trimmed(text.substr(0, text.find_last_not_of(" ,", blank) + 1));
}

bool named_like_time(const std::string& low) {
  return low.starts_with("time") || low.starts_with("zeit") || low.starts_with("elapsed") || low.starts_with("t_") ||
         among(low, time_names);
}

struct UnitText {
  std::optional<base::Unit> unit;
  std::string_view detector;
};

// A unit in brackets or alone; a plain number is no unit here, it is a name.
UnitText unit_text(std::string_view text) {
  text = base::trimmed(text);
  const auto closed_by = [&](char open, char close) { return text.front() == open && text.back() == close; };
  while (text.size() >= 2 &&
         (closed_by('[', ']') || closed_by('(', ')') || closed_by('{', '}') || closed_by('<', '>'))) {
    text = base::trimmed(text.substr(1, text.size() - 2));
  }
  UnitText out;
  text = without_detector(text, out.detector);
  if (text.empty() || text == "-" || text.find_first_not_of("0123456789.+-") == std::string_view::npos) return out;
  out.unit = base::unit_named(text);
  if (!out.unit) out.unit = time_unit_in(text);
  return out;
}

std::optional<base::Unit> unit_in(std::string_view text) { return unit_text(text).unit; }

// The name, without the signs that stood between it and the unit; a detector stays part of it.
void split_off(ColumnLabel& label, std::string_view name, const UnitText& found) {
  const auto last = name.find_last_not_of(" \t,/:=|");
  label.name = std::string(base::trimmed(name.substr(0, last == std::string_view::npos ? 0 : last + 1)));
  if (!found.detector.empty()) label.name += (label.name.empty() ? "" : " ") + std::string(found.detector);
  label.unit = found.unit;
}

// "Ax [g]", "Ax(g)", "[g] Ax", "Ax [g] left": the last brackets that hold a unit.
bool bracketed(std::string_view cell, ColumnLabel& label) {
  for (auto close = cell.find_last_of("])}>"); close != std::string_view::npos && close > 0;
       close = cell.find_last_of("])}>", close - 1)) {
    constexpr std::string_view opening = "[({<";
    const char open_sign = opening[std::string_view("])}>").find(cell[close])];
    std::size_t open = close;
    for (int depth = 1; depth > 0 && open > 0;) {
      --open;
      depth += cell[open] == cell[close] ? 1 : (cell[open] == open_sign ? -1 : 0);
    }
    if (cell[open] != open_sign) continue;
    const UnitText found = unit_text(cell.substr(open, close - open + 1));
    if (!found.unit) continue;
    const std::string_view behind = base::trimmed(cell.substr(close + 1));
    const std::string_view before = base::trimmed(cell.substr(0, open));
    split_off(label, before.empty() ? behind : before, found);
    if (!before.empty() && !behind.empty()) label.name += " " + std::string(behind);
    return true;
  }
  return false;
}

// "a in g", "a / g", "t/s", "Velocity mm/s", "Velocity mm/s RMS"; a single letter without "in" or "/" is part of the
// name ("Motor N"). A unit by itself is no name with a unit.
bool trailing(std::string_view cell, ColumnLabel& label) {
  if (base::unit_named(cell)) return false;
  for (const std::string_view between : {" in ", " / ", ", ", "/"}) {
    const auto at = between == "/" ? cell.find(between) : cell.rfind(between);
    if (at == std::string_view::npos || at == 0) continue;
    const UnitText found = unit_text(cell.substr(at + between.size()));
    const bool part_of_unit = between == "/" && unit_in(cell.substr(cell.rfind(' ', at) + 1)).has_value();
    if (found.unit && !part_of_unit) {
      split_off(label, cell.substr(0, at), found);
      return true;
    }
  }
  std::string_view detector;
  const std::string_view rest = without_detector(cell, detector);
  const auto blank = rest.rfind(' ');
  if (blank == std::string_view::npos || rest.size() - blank < 3) return false;
  UnitText found = unit_text(rest.substr(blank + 1));
  found.detector = detector;
  const bool of_time = found.unit && found.unit->quantity == base::Quantity::time;
  if (!found.unit || (of_time && !named_like_time(base::lower(rest.substr(0, blank))))) return false;  // "Speed min"
  split_off(label, rest.substr(0, blank), found);
  return true;
}

// "time_ms", "t_s", "acc_x_g", "vel_mm_s": the longest unit behind an underline. A single letter counts for times and,
// as g, for accelerations only.
void underlined(ColumnLabel& label) {
  if (label.unit) return;
  const std::string low = base::lower(label.name);
  for (auto at = low.find('_'); at != std::string::npos; at = low.find('_', at + 1)) {
    const std::string behind = low.substr(at + 1);
    if (label.is_time) {
      label.unit = time_unit_in(behind);
    } else if (behind == "g" && low.starts_with("a")) {
      label.unit = base::unit_named("g");
    } else {
      const auto found = std::find_if(plain_spellings.begin(), plain_spellings.end(),
                                      [&](const auto& each) { return each.first == behind; });
      if (found != plain_spellings.end()) label.unit = base::unit_named(found->second);
    }
    if (label.unit) return;
  }
}

std::vector<std::string> header_cells(std::string_view line, char separator) {
  const std::string_view bare_line = base::trimmed(line);
  const bool semicolon = separator != ';' && bare_line.starts_with(';');
  if (!bare_line.empty() && (is_blank_or_comment(line) || semicolon)) {
    line = bare_line.substr(std::min(bare_line.find_first_not_of("#%/;! \t"), bare_line.size()));
  }
  std::vector<std::string_view> parts;
  split_cells(line, separator, parts);
  std::vector<std::string> cells;
  for (const std::string_view part : parts) {
    // With blanks between columns, a unit in brackets belongs to the name before it.
    const bool goes_on = separator == ' ' && !cells.empty() && (part.starts_with('[') || part.starts_with('('));
    if (goes_on) {
      cells.back() += " " + std::string(part);
    } else {
      cells.emplace_back(bare(part));
    }
  }
  return cells;
}

// The columns of numbers of a line that spans them all.
std::vector<std::string> over_numbers(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  std::vector<std::string> over;
  if (cells.size() < dialect.numeric.size()) return over;
  for (std::size_t c = 0; c < dialect.numeric.size(); ++c) {
    if (dialect.numeric[c]) over.push_back(cells[c]);
  }
  return over;
}

bool are_units(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  std::vector<std::string> over = over_numbers(cells, dialect);
  if (over.size() > 1 && dialect.numeric.front() && !unit_in(over.front())) over.erase(over.begin());
  return !over.empty() &&
         std::all_of(over.begin(), over.end(), [](const std::string& cell) { return cell.empty() || unit_in(cell); }) &&
         std::any_of(over.begin(), over.end(), [](const std::string& cell) { return !cell.empty(); });
}

bool are_names(const std::vector<std::string>& cells, const CsvDialect& dialect) {
  const std::vector<std::string> over = over_numbers(cells, dialect);
  const auto named = std::count_if(over.begin(), over.end(),
                                   [](const std::string& cell) { return read_cell(cell, '.').kind == CellKind::text; });
  return !over.empty() && 2 * static_cast<std::size_t>(named) > over.size();
}

// The separators a header line may have: that of the rows, else another that gives a cell for each column.
std::vector<std::string> cells_of(const std::string& line, const CsvDialect& dialect) {
  std::vector<std::string> cells = header_cells(line, dialect.separator);
  if (cells.size() > 1 || dialect.numeric.size() < 2) return cells;
  for (const char other : {'\t', ';', ',', ' '}) {
    std::vector<std::string> by_other = header_cells(line, other);
    if (by_other.size() == dialect.numeric.size()) return by_other;
  }
  return cells;
}

}  // namespace

ColumnLabel read_label(std::string_view cell) {
  ColumnLabel label;
  cell = base::trimmed(cell);
  if (!bracketed(cell, label) && !trailing(cell, label)) label.name = std::string(cell);
  const std::string low = base::lower(label.name);
  const bool time_unit = label.unit && label.unit->quantity == base::Quantity::time;
  const bool may_be_minimum = low.size() < 2 || low == "min" || low == "mins" || low == "hr";
  const auto named_by_unit = may_be_minimum || label.unit ? std::nullopt : time_unit_in(low);
  const bool spelt = low.find("time") != std::string::npos || low.find("zeit") != std::string::npos;
  const bool named = time_unit ? named_like_time(low) || spelt : named_like_time(low) && !label.unit;
  label.is_time = named_by_unit || named || (low.empty() && time_unit);
  if (named_by_unit) label.unit = named_by_unit;
  label.is_counter = among(low, counter_names) && !label.unit;
  underlined(label);
  return label;
}

namespace {

// The lines of the header as UTF-8; a line end within quotes is a blank.
std::vector<std::string> logical_lines(const CsvDialect& dialect, const TextSource& text) {
  constexpr std::size_t most_joined = 8;  // beyond that it is a lone quote
  std::vector<std::string> lines;
  std::size_t joined = 0;
  bool open = false;
  for (const std::string& line : dialect.header) {
    std::string read = text.utf8(line);
    const bool odd_quotes = std::count(read.begin(), read.end(), '"') % 2 != 0;
    if (open && joined < most_joined) {
      lines.back() = std::string(base::trimmed(lines.back())) + " " + read;
      ++joined;
    } else {
      lines.push_back(std::move(read));
      open = false;
      joined = 0;
    }
    open = open != odd_quotes;
  }
  return lines;
}

}  // namespace

std::vector<ColumnLabel> read_header(const CsvDialect& dialect, const TextSource& text) {
  std::vector<std::string> names;
  std::vector<std::string> units;
  const std::vector<std::string> lines = logical_lines(dialect, text);
  for (auto line = lines.rbegin(); line != lines.rend(); ++line) {
    const std::vector<std::string> cells = cells_of(*line, dialect);
    if (units.empty() && are_units(cells, dialect)) {
      units = cells;
    } else if (names.empty() && are_names(cells, dialect)) {
      names = cells;
    }
    if (!names.empty() && !units.empty()) break;
  }

  std::vector<ColumnLabel> labels(dialect.numeric.size());
  for (std::size_t c = 0; c < labels.size(); ++c) {
    if (c < names.size()) labels[c] = read_label(base::printable(names[c]));
    if (labels[c].unit || c >= units.size()) continue;
    labels[c].unit = unit_in(units[c]);
    const bool of_time = labels[c].unit && labels[c].unit->quantity == base::Quantity::time;
    if (labels[c].name.empty() && of_time) labels[c].is_time = true;
  }
  return labels;
}

}  // namespace stillmass::recording
