#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/interval.hpp"

namespace stillmass::report {

/// A picture as plain data: what is shown, not how. `plotly_json` draws it on the screen, `svg` on paper. Numbers are
/// in the unit that the axis names (trade units: charts are for people). Every number is finite; a gap ends a segment.
enum class Scale { linear, logarithmic };

struct Axis {
  std::string label{};  ///< "Velocity"
  std::string unit{};   ///< "mm/s r.m.s."; empty: dimensionless
  Scale scale = Scale::linear;
  std::optional<base::Interval> range{};  ///< absent: from the data. On a logarithmic axis both ends are positive
  std::optional<double> tick_step{};      ///< linear only, for angles: 90
  std::vector<std::string> categories{};  ///< names at 0, 1, 2, ... instead of numbers
};

/// Unbroken run of points; x rises (or, for points and shapes, is in any order).
struct Segment {
  std::vector<double> x{};
  std::vector<double> y{};
};

enum class Style {
  line,    ///< points joined
  step,    ///< value held to the next point
  points,  ///< marks only
  stems,   ///< a line from the foot of the panel to each point: discrete spectrum lines
  bars,    ///< one bar for each point, on categories or third octaves
};

struct Series {
  std::string name{};
  Style style = Style::line;
  std::vector<Segment> segments{};
  /// Half-width of an error bar of each point of the first segment; empty: none. For points and bars only.
  std::vector<double> error{};
  bool quiet = false;  ///< background information: thin and grey (a limit of error, other channels)
};

/// Filled area between two curves: an interval of uncertainty.
struct Band {
  std::string name{};
  std::vector<double> x{}, low{}, high{};
};

enum class Direction { vertical, horizontal };
enum class MarkKind { natural_frequency, forcing_frequency, limit, plain };

/// A line across the panel at one value of x (vertical) or y (horizontal), with a label. Vertical marks of the first
/// panel are labelled; give the same marks to the panels below and they continue there without labels.
struct Mark {
  Direction direction = Direction::vertical;
  double at = 0.0;
  std::string label{};
  MarkKind kind = MarkKind::plain;
};

enum class Tone { neutral, good, caution, bad };

/// Shaded stripe across the panel over a range of y (horizontal: severity zones) or of x (vertical: speed ranges,
/// frequency bands). An absent end reaches to the edge of the panel.
struct Zone {
  Direction direction = Direction::horizontal;
  std::optional<double> from{};
  std::optional<double> to{};
  std::string label{};
  Tone tone = Tone::neutral;
};

/// A word at a point of the data: the name of a peak. The point survives every reduction.
struct Callout {
  double x = 0.0;
  double y = 0.0;
  std::string text{};
};

/// Values on a grid: a waterfall. `values[row * x.size() + column]` at x[column], y[row], the centres of cells; both
/// rise. On a logarithmic scale a value <= 0 shows as the lowest.
struct HeatMap {
  std::vector<double> x{}, y{}, values{};
  std::string label{};
  std::string unit{};
  Scale scale = Scale::linear;
  std::optional<base::Interval> range{};  ///< of the colours
};

/// One frame; the panels of a chart stand above each other and share x.
struct Panel {
  Axis y{};
  std::vector<Series> series{};
  std::vector<Band> bands{};
  std::vector<Mark> marks{};
  std::vector<Zone> zones{};
  std::vector<Callout> callouts{};
  std::optional<HeatMap> heat_map{};  ///< series on the same panel (order lines) lie over it
  double height = 1.0;                ///< in relation to the other panels
};

struct Chart {
  std::string title{};
  std::string caption{};      ///< how it was made: window, lines, averages
  std::string description{};  ///< the picture in words, for those who do not see it; empty: made from the data
  Axis x{};
  std::vector<Panel> panels{};
  bool equal_scales = false;  ///< one unit of x as long as one of y: Nyquist plots, orbits
};

/// The points as unbroken segments: cut where x or y is not finite.
std::vector<Segment> segments_of(std::span<const double> x, std::span<const double> y);

/// Shorthand for the usual series: `segments_of` with a name and a style.
Series series_of(std::string name, std::span<const double> x, std::span<const double> y, Style style = Style::line);

/// What must hold for a chart to be drawn: at least one panel, finite numbers, equal lengths, a heat map of the right
/// size, positive ranges on logarithmic axes. Throws `Error` of kind `internal` that names the chart and the rule.
/// (Points that are <= 0 on a logarithmic axis are allowed: they are left out of the picture.)
void check(const Chart& chart);

/// Range of an axis as drawn: `axis.range`, or the extent of what is drawn. Along x as it is; along y with a margin,
/// and from 0 on a linear axis whose data are positive and come near it; over at most 6 decades on a logarithmic one,
/// so that a value near zero does not stretch it. Only what lies within a given range of x counts for y. Horizontal
/// marks and zones count while they are not far from the data (2 spans, or a factor of 10). Never empty.
base::Interval x_range(const Chart& chart);
base::Interval y_range(const Chart& chart, const Panel& panel);

/// Range of a heat map's colours: `map.range`, or the extent of its values, over at most 4 decades.
base::Interval colour_range(const HeatMap& map);

struct Tick {
  double at = 0.0;
  std::string text{};
};

/// Ticks of an axis over a range: about `wanted` round numbers (1, 2, 5 times a power of ten) or multiples of
/// `tick_step`; decades (with 2 and 5 where there is room) on a logarithmic axis; the categories where there are any.
std::vector<Tick> ticks(const Axis& axis, base::Interval range, int wanted);

/// "Velocity (mm/s)".
std::string title_of(const Axis& axis);

/// `chart.description`, or a sentence made from titles, axes, series and marks.
std::string description_of(const Chart& chart);

}  // namespace stillmass::report
