#include <algorithm>
#include <cmath>
#include <limits>

#include <fmt/format.h>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

namespace {

constexpr double decades_of_axis = 1e6;
constexpr double decades_of_colours = 1e4;

/// The least interval that holds what it was shown.
class Extent {
 public:
  explicit Extent(Scale scale) : scale_(scale) {}

  void add(double value) {
    if (scale_ == Scale::logarithmic && value <= 0.0) return;
    lo_ = std::min(lo_, value);
    hi_ = std::max(hi_, value);
  }
  /// Marks and limits stretch the extent only while they are near it.
  void add_if_near(double value) {
    if (empty()) return;
    const double span = std::max(hi_ - lo_, std::abs(hi_));
    const bool near = scale_ == Scale::logarithmic ? value > 0.1 * lo_ && value < 10.0 * hi_
                                                   : value > lo_ - 2.0 * span && value < hi_ + 2.0 * span;
    if (near) add(value);
  }
  bool empty() const { return lo_ > hi_; }

  /// Not empty, whatever was added.
  base::Interval interval() const {
    if (empty()) return scale_ == Scale::logarithmic ? base::Interval{0.1, 1.0} : base::Interval{0.0, 1.0};
    if (lo_ < hi_) return {lo_, hi_};
    if (scale_ == Scale::logarithmic) return {0.5 * lo_, 2.0 * lo_};
    const double half = lo_ == 0.0 ? 1.0 : 0.5 * std::abs(lo_);
    return {lo_ - half, lo_ + half};
  }

 private:
  Scale scale_;
  double lo_ = std::numeric_limits<double>::infinity();
  double hi_ = -std::numeric_limits<double>::infinity();
};

/// Edges of the first and last cell: half a cell beyond their centres.
base::Interval cell_edges(std::span<const double> centres) {
  if (centres.size() < 2) return {centres.front() - 0.5, centres.front() + 0.5};
  const std::size_t last = centres.size() - 1;
  return {centres[0] - 0.5 * (centres[1] - centres[0]), centres[last] + 0.5 * (centres[last] - centres[last - 1])};
}

base::Interval category_range(const Axis& axis) { return {-0.5, static_cast<double>(axis.categories.size()) - 0.5}; }

void add_series(Extent& extent, const Series& series, const base::Interval& x) {
  for (const Segment& segment : series.segments) {
    for (std::size_t i = 0; i < segment.x.size(); ++i) {
      if (!x.contains(segment.x[i])) continue;
      const double error = i < series.error.size() ? series.error[i] : 0.0;
      extent.add(segment.y[i] - error);
      extent.add(segment.y[i] + error);
    }
  }
  if (series.style == Style::bars) extent.add(0.0);
}

void add_marks(Extent& extent, const Panel& panel) {
  for (const Mark& mark : panel.marks) {
    if (mark.direction == Direction::horizontal) extent.add_if_near(mark.at);
  }
  for (const Zone& zone : panel.zones) {
    if (zone.direction != Direction::horizontal) continue;
    if (zone.from) extent.add_if_near(*zone.from);
    if (zone.to) extent.add_if_near(*zone.to);
  }
}

base::Interval with_margin(base::Interval range, Scale scale) {
  if (scale == Scale::logarithmic) return {std::max(range.lo / 1.3, range.hi / decades_of_axis), range.hi * 1.6};
  const double margin = 0.06 * range.width();
  const bool from_zero = range.lo >= 0.0 && range.lo < 0.5 * range.hi;
  const bool to_zero = range.hi <= 0.0 && range.hi > 0.5 * range.lo;
  return {from_zero ? 0.0 : range.lo - margin, to_zero ? 0.0 : range.hi + margin};
}

double round_step(double rough) {
  const double decade = std::pow(10.0, std::floor(std::log10(rough)));
  const double part = rough / decade;
  return decade * (part < 1.5 ? 1.0 : part < 3.5 ? 2.0 : part < 7.5 ? 5.0 : 10.0);
}

std::string superscript(int number) {
  static constexpr const char* digits[] = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
  std::string text = number < 0 ? "⁻" : "";
  for (const char c : fmt::format("{}", std::abs(number))) text += digits[c - '0'];
  return text;
}

/// A number on an axis whose neighbours differ by `step`: "0.25", "1500", "2×10⁻⁶", with a true minus sign.
std::string tick_text(double value, double step) {
  const double size = std::max(std::abs(value), step);
  const bool powers = size >= 1e6 || size < 1e-3;
  if (powers && value == 0.0) return "0";
  std::string text;
  if (powers) {
    const int exponent = static_cast<int>(std::floor(std::log10(std::abs(value)) + 1e-9));
    const std::string factor = fmt::format("{:.3g}", std::abs(value) / std::pow(10.0, exponent));
    text = (factor == "1" ? "10" : factor + "×10") + superscript(exponent);
  } else {
    const int decimals = std::max(0, static_cast<int>(std::ceil(-std::log10(step) - 1e-9)));
    text = fmt::format("{:.{}f}", std::abs(value), decimals);
  }
  return value < 0.0 ? "−" + text : text;
}

std::vector<Tick> linear_ticks(double step, base::Interval range) {
  std::vector<Tick> found;
  const double slack = 1e-9 * range.width();
  const auto first = static_cast<long long>(std::ceil((range.lo - slack) / step));
  const auto last = static_cast<long long>(std::floor((range.hi + slack) / step));
  for (long long i = first; i <= last; ++i) {
    const double at = static_cast<double>(i) * step;
    found.push_back({at, tick_text(at, step)});
  }
  return found;
}

std::vector<Tick> decade_ticks(base::Interval range, int wanted) {
  const int first = static_cast<int>(std::floor(std::log10(range.lo)));
  const int last = static_cast<int>(std::floor(std::log10(range.hi)));
  const int decades = last - first;
  const int stride = std::max(1, (decades + wanted - 1) / wanted);
  std::vector<Tick> found;
  for (int exponent = first; exponent <= last; exponent += stride) {
    for (const double factor : {1.0, 2.0, 5.0}) {
      if (factor > 1.0 && (stride > 1 || 3 * decades > 2 * wanted)) continue;
      const double at = factor * std::pow(10.0, exponent);
      if (range.contains(at)) found.push_back({at, tick_text(at, at)});
    }
  }
  return found;
}

}  // namespace

base::Interval x_range(const Chart& chart) {
  if (!chart.x.categories.empty()) return category_range(chart.x);
  if (chart.x.range) return *chart.x.range;
  Extent extent(chart.x.scale);
  for (const Panel& panel : chart.panels) {
    for (const Series& series : panel.series) {
      for (const Segment& segment : series.segments) {
        for (const double x : segment.x) extent.add(x);
      }
    }
    for (const Band& band : panel.bands) {
      for (const double x : band.x) extent.add(x);
    }
    if (panel.heat_map) {
      const base::Interval edges = cell_edges(panel.heat_map->x);
      extent.add(edges.lo);
      extent.add(edges.hi);
    }
  }
  return extent.interval();
}

base::Interval y_range(const Chart& chart, const Panel& panel) {
  if (!panel.y.categories.empty()) return category_range(panel.y);
  if (panel.y.range) return *panel.y.range;
  if (panel.heat_map) return cell_edges(panel.heat_map->y);
  const base::Interval x = x_range(chart);
  Extent extent(panel.y.scale);
  for (const Series& series : panel.series) add_series(extent, series, x);
  for (const Band& band : panel.bands) {
    for (std::size_t i = 0; i < band.x.size(); ++i) {
      if (!x.contains(band.x[i])) continue;
      extent.add(band.low[i]);
      extent.add(band.high[i]);
    }
  }
  add_marks(extent, panel);
  return with_margin(extent.interval(), panel.y.scale);
}

base::Interval colour_range(const HeatMap& map) {
  if (map.range) return *map.range;
  Extent extent(map.scale);
  for (const double value : map.values) extent.add(value);
  base::Interval range = extent.interval();
  if (map.scale == Scale::logarithmic) range.lo = std::max(range.lo, range.hi / decades_of_colours);
  return range;
}

std::vector<Tick> ticks(const Axis& axis, base::Interval range, int wanted) {
  wanted = std::max(wanted, 2);
  if (!axis.categories.empty()) {
    std::vector<Tick> found;
    for (std::size_t i = 0; i < axis.categories.size(); ++i)
      found.push_back({static_cast<double>(i), axis.categories[i]});
    return found;
  }
  if (axis.scale == Scale::logarithmic) {
    std::vector<Tick> found = decade_ticks(range, wanted);
    if (found.size() >= 3) return found;
  } else if (axis.tick_step && range.width() / *axis.tick_step < 50.0) {
    return linear_ticks(*axis.tick_step, range);
  }
  return linear_ticks(round_step(range.width() / wanted), range);
}

}  // namespace stillmass::report
