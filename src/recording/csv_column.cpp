#include "recording/csv_column.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "stillmass/base/number.hpp"

#include "recording/csv_cell.hpp"
#include "recording/csv_dialect.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t rows_for_time = 3;  // fewer do not show that a column without a name is time
constexpr double backward_share = 0.05;   // of the steps of a column of times
constexpr double even_share = 0.9;        // of the steps of a column of times without a name ...
constexpr double counting_share = 0.5;    // of the steps of row numbers are 1, however many rows were lost
constexpr double even_tolerance = 0.5;    // ... lie so close to the median, relative

// Decimals of the last printed digit: "0.048" 3, "1.25E-3" 5.
int decimals_of(std::string_view text) {
  const auto exponent_at = text.find_first_of("eE");
  const std::string_view mantissa = text.substr(0, exponent_at);
  const auto sign = mantissa.find_last_of(".,");
  int decimals = sign == std::string_view::npos ? 0 : static_cast<int>(mantissa.size() - sign - 1);
  if (exponent_at != std::string_view::npos) {
    decimals -= static_cast<int>(base::parse_integer(text.substr(exponent_at + 1)).value_or(0));
  }
  return decimals;
}

}  // namespace

std::vector<CsvColumn> columns_of(const CsvDialect& dialect) {
  std::vector<CsvColumn> columns(dialect.numeric.size());
  std::vector<std::string_view> cells;
  for (const std::string& row : dialect.rows) {
    split_cells(row, dialect.separator, cells);
    for (std::size_t c = 0; c < std::min(cells.size(), columns.size()); ++c) {
      const Cell cell = read_cell(cells[c], dialect.decimal);
      if (cell.kind != CellKind::number && cell.kind != CellKind::time) continue;
      CsvColumn& column = columns[c];
      column.texts.emplace_back(bare(cells[c]));
      double value = cell.value;
      if (cell.kind == CellKind::time) {
        if (!column.stamps) {
          column.stamps = true;
          column.reading.order = dialect.date_order;
          if (date_part(cells[c]).empty()) column.reading.begin_at(value);
        }
        value = column.reading.seconds(column.texts.back()).value_or(value);
      }
      column.values.push_back(value);
    }
  }
  return columns;
}

const CsvColumn& column_of(const CsvDialect& dialect, std::size_t field) { return dialect.columns[field]; }

std::vector<double> CsvColumn::steps() const {
  std::vector<double> steps;
  for (std::size_t i = 1; i < values.size(); ++i) steps.push_back(values[i] - values[i - 1]);
  return steps;
}

double CsvColumn::median_step() const {
  std::vector<double> sorted = steps();
  if (sorted.empty()) return 0.0;
  const auto middle = sorted.begin() + static_cast<std::ptrdiff_t>(sorted.size() / 2);
  std::nth_element(sorted.begin(), middle, sorted.end());
  return *middle;
}

bool CsvColumn::grows() const {
  const std::vector<double> all = steps();
  const auto back = std::count_if(all.begin(), all.end(), [](double step) { return step < 0.0; });
  const bool forth = std::any_of(all.begin(), all.end(), [](double step) { return step > 0.0; });
  return forth && static_cast<double>(back) <= backward_share * static_cast<double>(all.size());
}

bool CsvColumn::runs_back() const { return values.size() > 1 && values.back() < values.front() && median_step() < 0.0; }

bool CsvColumn::moves() const {
  return std::any_of(values.begin(), values.end(), [&](double value) { return value != values.front(); });
}

bool CsvColumn::turns_back() const {
  const std::vector<double> all = steps();
  return std::any_of(all.begin(), all.end(), [](double step) { return step < 0.0; });
}

bool CsvColumn::repeats() const {
  const std::vector<double> all = steps();
  return std::any_of(all.begin(), all.end(), [](double step) { return step == 0.0; });
}

bool CsvColumn::grows_evenly() const {
  if (values.size() < rows_for_time || !grows()) return false;
  const std::vector<double> all = steps();
  const double median = median_step();
  const auto even = std::count_if(all.begin(), all.end(),
                                  [&](double step) { return std::abs(step - median) <= even_tolerance * median; });
  return median > 0.0 && static_cast<double>(even) >= even_share * static_cast<double>(all.size());
}

bool CsvColumn::whole_numbers() const {
  return std::all_of(texts.begin(), texts.end(),
                     [](const std::string& text) { return base::parse_integer(text).has_value(); });
}

bool CsvColumn::counts_rows() const {
  const std::vector<double> all = steps();
  return values.size() >= rows_for_time && whole_numbers() &&
         std::all_of(all.begin(), all.end(), [](double step) { return step == 1.0; });
}

bool CsvColumn::counts() const {
  const std::vector<double> all = steps();
  const auto ones = std::count(all.begin(), all.end(), 1.0);
  return values.size() >= rows_for_time && whole_numbers() &&
         static_cast<double>(ones) >= counting_share * static_cast<double>(all.size());
}

double CsvColumn::last_digit() const {
  int decimals = std::numeric_limits<int>::min();
  for (const std::string& text : texts)
    decimals = std::max(decimals, stamps ? fraction_digits(text) : decimals_of(text));
  return texts.empty() ? 0.0 : std::pow(10.0, -decimals);
}

}  // namespace stillmass::recording
