#include "recording/csv_dates.hpp"

#include <algorithm>
#include <optional>
#include <string>
#include <vector>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

#include "recording/csv_cell.hpp"

namespace stillmass::recording {
namespace {

constexpr std::int64_t tail_bytes = 64 * 1024;
constexpr std::size_t rows_for_a_stamp = 20;  // a column without one among so many holds none

std::string cell_at(const std::string& row, std::size_t field, char separator) {
  std::vector<std::string_view> cells;
  split_cells(row, separator, cells);
  return field < cells.size() ? std::string(bare(cells[field])) : std::string();
}

// The cell of that column in the last line of the file that has a date there.
std::string last_cell(const CsvDialect& dialect, const TextSource& text, std::size_t field) {
  const std::int64_t from = std::max(dialect.data_offset, text.size() - tail_bytes);
  std::string tail(static_cast<std::size_t>(text.size() - from), '\0');
  tail.resize(text.read_at(from, tail.data(), tail.size()));
  const auto lines = base::split(tail, '\n');
  for (auto line = lines.rbegin(); line != lines.rend(); ++line) {
    std::string cell = cell_at(std::string(*line), field, dialect.separator);
    if (parse_timestamp(cell)) return cell;
  }
  return {};
}

[[noreturn]] void refuse_mixed(const std::string& cell, const std::string& where) {
  throw base::file_error(where, fmt::format("the date \"{}\" has day and month the other way round than others", cell),
                         "export it with dates such as 2024-02-28");
}

}  // namespace

void settle_date_order(CsvDialect& dialect, const TextSource& text, const TextOptions& options) {
  if (options.day_first) {
    dialect.date_order = *options.day_first ? DateOrder::day_first : DateOrder::month_first;
    return;
  }
  for (std::size_t c = 0; c < dialect.numeric.size(); ++c) {
    std::string first;
    std::optional<DateOrder> known;
    const auto learn = [&](const std::string& cell) {
      const OrderEvidence evidence = order_evidence(cell);
      if (evidence == OrderEvidence::none || evidence == OrderEvidence::either) return;
      const DateOrder order = evidence == OrderEvidence::day_first ? DateOrder::day_first : DateOrder::month_first;
      if (known && *known != order) refuse_mixed(cell, text.file().name());
      known = order;
    };
    const auto stamped = [&](const std::string& row) {
      return parse_timestamp(cell_at(row, c, dialect.separator)).has_value();
    };
    const auto look = static_cast<std::ptrdiff_t>(std::min(dialect.rows.size(), rows_for_a_stamp));
    if (std::none_of(dialect.rows.begin(), dialect.rows.begin() + look, stamped)) continue;
    for (const std::string& row : dialect.rows) {
      const std::string cell = cell_at(row, c, dialect.separator);
      if (!parse_timestamp(cell) || date_part(cell).empty()) continue;
      if (first.empty()) first = cell;
      learn(cell);
    }
    if (first.empty()) continue;
    const std::string last = last_cell(dialect, text, c);
    learn(last);
    if (known) {
      dialect.date_order = *known;
    } else if ((order_evidence(first) == OrderEvidence::either || order_evidence(last) == OrderEvidence::either) &&
               date_part(first) != date_part(last)) {
      throw base::usage_error(
          text.file().name(),
          fmt::format("the dates from {} to {} may have the day or the month first", date_part(first), date_part(last)),
          "say which with --dates day-first or --dates month-first");
    }
    return;
  }
}

}  // namespace stillmass::recording
