#include "stillmass/report/reduce.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <optional>
#include <vector>

namespace stillmass::report {

namespace {

/// Which column of a picture a value of x falls into.
class Columns {
 public:
  Columns(double first, double last, Scale scale, std::size_t count)
      : scale_(scale), count_(count), from_(place(first)), width_(place(last) - from_) {}

  std::size_t of(double x) const {
    if (!(width_ > 0.0)) return 0;
    const double column = (place(x) - from_) / width_ * static_cast<double>(count_);
    return static_cast<std::size_t>(std::clamp(column, 0.0, static_cast<double>(count_ - 1)));
  }

 private:
  double place(double x) const { return scale_ == Scale::logarithmic ? std::log(x) : x; }

  Scale scale_;
  std::size_t count_;
  double from_, width_;
};

Segment positive_part(const Segment& curve) {
  Segment kept;
  for (std::size_t i = 0; i < curve.x.size(); ++i) {
    if (curve.x[i] <= 0.0) continue;
    kept.x.push_back(curve.x[i]);
    kept.y.push_back(curve.y[i]);
  }
  return kept;
}

/// End of the run of indices from `begin` whose x falls into the same column.
std::size_t column_end(const std::vector<double>& x, const Columns& columns, std::size_t begin) {
  std::size_t end = begin + 1;
  while (end < x.size() && columns.of(x[end]) == columns.of(x[begin])) ++end;
  return end;
}

/// Index of the point of a rising x that lies nearest to `wanted`, if it lies within x at all.
std::optional<std::size_t> nearest(const std::vector<double>& x, double wanted) {
  if (x.empty() || wanted < x.front() || wanted > x.back()) return {};
  const auto after = std::lower_bound(x.begin(), x.end(), wanted);
  const auto index = static_cast<std::size_t>(after - x.begin());
  if (index > 0 && (index == x.size() || wanted - x[index - 1] < x[index] - wanted)) return index - 1;
  return index;
}

/// Centres of tiles of `per_tile` cells.
std::vector<double> tile_centres(const std::vector<double>& cells, std::size_t per_tile) {
  std::vector<double> centres;
  for (std::size_t begin = 0; begin < cells.size(); begin += per_tile) {
    const std::size_t end = std::min(begin + per_tile, cells.size());
    centres.push_back(0.5 * (cells[begin] + cells[end - 1]));
  }
  return centres;
}

std::size_t cells_per_tile(std::size_t cells, std::size_t tiles) { return (cells + tiles - 1) / tiles; }

}  // namespace

Segment reduced(const Segment& curve, Scale x_scale, std::size_t columns, std::span<const double> keep) {
  if (x_scale == Scale::logarithmic && std::any_of(curve.x.begin(), curve.x.end(), [](double x) { return x <= 0.0; })) {
    return reduced(positive_part(curve), x_scale, columns, keep);
  }
  if (columns == 0 || curve.x.size() <= 4 * columns || !std::is_sorted(curve.x.begin(), curve.x.end())) return curve;

  std::vector<std::size_t> chosen;
  const Columns grid(curve.x.front(), curve.x.back(), x_scale, columns);
  for (std::size_t begin = 0; begin < curve.x.size();) {
    const std::size_t end = column_end(curve.x, grid, begin);
    const auto first = curve.y.begin() + static_cast<std::ptrdiff_t>(begin);
    const auto last = curve.y.begin() + static_cast<std::ptrdiff_t>(end);
    const auto [low, high] = std::minmax_element(first, last);
    chosen.insert(chosen.end(), {begin, static_cast<std::size_t>(low - curve.y.begin()),
                                 static_cast<std::size_t>(high - curve.y.begin()), end - 1});
    begin = end;
  }
  for (const double x : keep) {
    if (const auto index = nearest(curve.x, x)) chosen.push_back(*index);
  }
  std::sort(chosen.begin(), chosen.end());
  chosen.erase(std::unique(chosen.begin(), chosen.end()), chosen.end());

  Segment kept;
  for (const std::size_t index : chosen) {
    kept.x.push_back(curve.x[index]);
    kept.y.push_back(curve.y[index]);
  }
  return kept;
}

Band reduced(const Band& band, Scale x_scale, std::size_t columns) {
  const bool drawable = x_scale == Scale::linear || band.x.empty() || band.x.front() > 0.0;
  if (columns == 0 || band.x.size() <= 2 * columns || !std::is_sorted(band.x.begin(), band.x.end()) || !drawable) {
    return band;
  }
  Band kept;
  kept.name = band.name;
  const Columns grid(band.x.front(), band.x.back(), x_scale, columns);
  for (std::size_t begin = 0; begin < band.x.size();) {
    const std::size_t end = column_end(band.x, grid, begin);
    const auto from = static_cast<std::ptrdiff_t>(begin), to = static_cast<std::ptrdiff_t>(end);
    // Both ends of the column, so that the band reaches as far as the curve inside it.
    for (const double x : {band.x[begin], band.x[end - 1]}) {
      kept.x.push_back(x);
      kept.low.push_back(*std::min_element(band.low.begin() + from, band.low.begin() + to));
      kept.high.push_back(*std::max_element(band.high.begin() + from, band.high.begin() + to));
    }
    begin = end;
  }
  return kept;
}

HeatMap reduced(const HeatMap& map, std::size_t columns, std::size_t rows) {
  if (columns == 0 || rows == 0 || (map.x.size() <= columns && map.y.size() <= rows)) return map;
  const std::size_t wide = cells_per_tile(map.x.size(), columns);
  const std::size_t high = cells_per_tile(map.y.size(), rows);
  HeatMap tiles = map;
  tiles.x = tile_centres(map.x, wide);
  tiles.y = tile_centres(map.y, high);
  tiles.values.assign(tiles.x.size() * tiles.y.size(), -std::numeric_limits<double>::infinity());
  for (std::size_t row = 0; row < map.y.size(); ++row) {
    for (std::size_t column = 0; column < map.x.size(); ++column) {
      double& tile = tiles.values[row / high * tiles.x.size() + column / wide];
      tile = std::max(tile, map.values[row * map.x.size() + column]);
    }
  }
  return tiles;
}

Chart reduced(const Chart& chart, std::size_t columns, std::size_t heat_columns, std::size_t heat_rows) {
  Chart small = chart;
  for (Panel& panel : small.panels) {
    std::vector<double> keep;
    for (const Callout& callout : panel.callouts) keep.push_back(callout.x);
    for (const Mark& mark : panel.marks) {
      if (mark.direction == Direction::vertical) keep.push_back(mark.at);
    }
    for (Series& series : panel.series) {
      if (!series.error.empty()) continue;
      for (Segment& segment : series.segments) segment = reduced(segment, chart.x.scale, columns, keep);
    }
    for (Band& band : panel.bands) band = reduced(band, chart.x.scale, columns);
    if (panel.heat_map) panel.heat_map = reduced(*panel.heat_map, heat_columns, heat_rows);
  }
  return small;
}

}  // namespace stillmass::report
