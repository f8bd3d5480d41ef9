#include "stillmass/report/svg.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/report/reduce.hpp"

#include "report/svg_heat.hpp"
#include "report/svg_panel.hpp"

namespace stillmass::report {

namespace {

constexpr double page_width = 760.0;
constexpr double text_size = 12.0;
constexpr double small_text = 11.0;
constexpr double legend_row = 18.0;
constexpr double flag_row = 15.0;
constexpr double panel_gap = 16.0;

/// What a chart needs around its panels.
struct Layout {
  double left = 0.0, right = 0.0, top = 0.0, bottom = 0.0;
  double width() const { return page_width - left - right; }
};

struct Side {
  double at;
  std::string text;
};

/// Labels that stand to the right of a panel: horizontal marks and zones, at values of y that are in sight.
std::vector<Side> side_labels(const Panel& panel, base::Interval range) {
  std::vector<Side> labels;
  for (const Mark& mark : panel.marks) {
    if (mark.direction == Direction::horizontal && range.contains(mark.at) && !mark.label.empty()) {
      labels.push_back({mark.at, mark.label});
    }
  }
  for (const Zone& zone : panel.zones) {
    if (zone.direction != Direction::horizontal || zone.label.empty()) continue;
    const double from = std::max(zone.from.value_or(range.lo), range.lo);
    const double to = std::min(zone.to.value_or(range.hi), range.hi);
    if (from >= to) continue;
    const bool logarithmic = panel.y.scale == Scale::logarithmic;
    labels.push_back({logarithmic ? std::sqrt(from * to) : 0.5 * (from + to), zone.label});
  }
  return labels;
}

double panel_height(const Chart& chart, const Panel& panel) {
  if (chart.panels.size() == 1) return 300.0 * std::clamp(panel.height, 0.5, 2.0);
  double sum = 0.0;
  for (const Panel& each : chart.panels) sum += each.height;
  return std::max(90.0, std::min(190.0 * static_cast<double>(chart.panels.size()), 620.0) * panel.height / sum);
}

int wanted_ticks(double height) { return static_cast<int>(height / 45.0); }

std::vector<Flag> flags_of(const Chart& chart, const Ruler& x, double width) {
  std::vector<Flag> flags;
  for (const TopLabel& label : top_labels(chart, x.range())) {
    if (x.shows(label.x)) flags.push_back({x(label.x), label.text});
  }
  return placed_flags(std::move(flags), width, small_text);
}

struct Entry {
  double x, y;
  LegendEntry what;
};

/// Places of the legend's entries in rows over the panels; `rows` says how many there are.
std::vector<Entry> placed_legend(const Looks& looks, double width, int& rows) {
  std::vector<Entry> entries;
  double x = 0.0;
  rows = looks.legend().empty() ? 0 : 1;
  for (const LegendEntry& entry : looks.legend()) {
    const double wide = 24.0 + 6.0 + text_width(entry.name, text_size) + 18.0;
    if (x > 0.0 && x + wide > width) {
      x = 0.0;
      ++rows;
    }
    entries.push_back({x, (rows - 0.5) * legend_row, entry});
    x += wide;
  }
  return entries;
}

/// Labels of categories stand slanted where they are wider than their slot.
bool slanted(const Chart& chart, double width) {
  const double slot = width / static_cast<double>(std::max<std::size_t>(chart.x.categories.size(), 1));
  return std::any_of(chart.x.categories.begin(), chart.x.categories.end(),
                     [&](const std::string& name) { return text_width(name, text_size) > slot - 6.0; });
}

double widest_category(const Axis& axis) {
  double widest = 0.0;
  for (const std::string& name : axis.categories) widest = std::max(widest, text_width(name, text_size));
  return widest;
}

Layout layout_of(const Chart& chart) {
  double tick_width = 0.0, side_width = 0.0, scale_width = 0.0;
  bool two_lines = false;
  for (const Panel& panel : chart.panels) {
    const base::Interval range = y_range(chart, panel);
    const double height = panel_height(chart, panel);
    for (const Tick& tick : ticks(panel.y, range, wanted_ticks(height))) {
      tick_width = std::max(tick_width, text_width(tick.text, text_size));
    }
    for (const Side& side : side_labels(panel, range))
      side_width = std::max(side_width, text_width(side.text, small_text));
    if (panel.heat_map) scale_width = 88.0;
    two_lines = two_lines || text_width(title_of(panel.y), text_size) > height;
  }
  Layout layout;
  layout.left = (two_lines ? 38.0 : 24.0) + tick_width + 8.0;
  layout.right = std::max(side_width > 0.0 ? side_width + 10.0 : 14.0, scale_width);
  layout.bottom = 44.0;
  if (slanted(chart, layout.width())) layout.bottom += 0.5 * widest_category(chart.x);
  return layout;
}

void draw_y_axis(SvgWriter& out, const Panel& panel, const PanelFrame& frame, const std::vector<Tick>& y_ticks) {
  for (const Tick& tick : y_ticks) {
    out.text(frame.left - 7.0, frame.top + frame.y(tick.at) + 4.0, tick.text, Anchor::end, text_size);
  }
  const double middle = frame.top + 0.5 * frame.height;
  if (text_width(title_of(panel.y), text_size) > frame.height && !panel.y.unit.empty()) {
    out.upright_text(13.0, middle, panel.y.label, text_size);
    out.upright_text(27.0, middle, "(" + panel.y.unit + ")", text_size);
  } else {
    out.upright_text(15.0, middle, title_of(panel.y), text_size);
  }
}

void draw_sides(SvgWriter& out, const Panel& panel, const PanelFrame& frame) {
  const std::vector<Side> labels = side_labels(panel, frame.y.range());
  std::vector<double> wanted;
  for (const Side& label : labels) wanted.push_back(frame.y(label.at));
  const std::vector<double> places = spread(wanted, 13.0, 4.0, frame.height - 2.0);
  for (std::size_t i = 0; i < labels.size(); ++i) {
    out.text(frame.left + frame.width + 6.0, frame.top + places[i] + 4.0, labels[i].text, Anchor::start, small_text,
             "muted");
  }
}

void draw_x_axis(SvgWriter& out, const Chart& chart, const PanelFrame& frame, const std::vector<Tick>& x_ticks,
                 double page_foot) {
  const double foot = frame.top + frame.height;
  const bool slant = slanted(chart, frame.width);
  for (const Tick& tick : x_ticks) {
    const double x = frame.left + frame.x(tick.at);
    if (slant) out.slanted_text(x + 4.0, foot + 16.0, tick.text, text_size);
    if (!slant) out.text(x, foot + 17.0, tick.text, Anchor::middle, text_size);
  }
  out.text(frame.left + 0.5 * frame.width, page_foot - 8.0, title_of(chart.x), Anchor::middle, text_size);
}

void draw_flags(SvgWriter& out, const std::vector<Flag>& flags, const PanelFrame& frame) {
  for (const Flag& flag : flags) {
    const double x = frame.left + flag.at, y = frame.top - 5.0 - flag.row * flag_row;
    out.line(x, frame.top, x, y - 9.0, {"frame", 1.0});
    out.text(flag.to_left ? x - 3.0 : x + 3.0, y, flag.text, flag.to_left ? Anchor::end : Anchor::start, small_text);
  }
}

/// Ranges widened so that one unit of x is as long as one of y.
void make_equal(base::Interval& x, base::Interval& y, double width, double height) {
  const double per_unit = std::min(width / x.width(), height / y.width());
  const auto widened = [&](base::Interval range, double length) {
    const double half = 0.5 * length / per_unit;
    return base::Interval{range.middle() - half, range.middle() + half};
  };
  x = widened(x, width);
  y = widened(y, height);
}

}  // namespace

std::string svg(const Chart& full) {
  check(full);
  const Chart chart = reduced(full, 640, 160, 80);
  const Looks looks(chart);
  Layout layout = layout_of(chart);
  const double width = layout.width();
  base::Interval x_extent = x_range(full);
  const Ruler mark_ruler(chart.x.scale, x_extent, 0.0, width);
  const std::vector<Flag> flags = flags_of(chart, mark_ruler, width);

  int legend_rows = 0;
  const std::vector<Entry> legend = placed_legend(looks, width, legend_rows);
  int flag_rows = 0;
  for (const Flag& flag : flags) flag_rows = std::max(flag_rows, flag.row + 1);
  layout.top = 10.0 + legend_rows * legend_row + (flag_rows > 0 ? flag_rows * flag_row + 6.0 : 0.0);

  double foot = layout.top;
  for (const Panel& panel : chart.panels) foot += panel_height(chart, panel) + panel_gap;
  const double page_height = foot - panel_gap + layout.bottom;

  SvgWriter out;
  for (const Entry& entry : legend) {
    draw_sample(out, layout.left + entry.x, 4.0 + entry.y, entry.what);
    out.text(layout.left + entry.x + 30.0, 8.0 + entry.y, entry.what.name, Anchor::start, text_size);
  }
  double top = layout.top;
  for (std::size_t i = 0; i < chart.panels.size(); ++i) {
    const Panel& panel = chart.panels[i];
    const double height = panel_height(chart, panel);
    base::Interval y_extent = y_range(full, full.panels[i]);
    if (chart.equal_scales) make_equal(x_extent, y_extent, width, height);
    const PanelFrame frame{layout.left,
                           top,
                           width,
                           height,
                           Ruler(chart.x.scale, x_extent, 0.0, width),
                           Ruler(panel.y.scale, y_extent, height, 0.0)};
    const std::vector<Tick> x_ticks = ticks(chart.x, x_extent, static_cast<int>(width / 75.0));
    const std::vector<Tick> y_ticks = ticks(panel.y, y_extent, wanted_ticks(height));
    draw_inside(out, panel, frame, looks, x_ticks, y_ticks);
    out.frame(frame.left, frame.top, frame.width, frame.height, {"frame", 1.0});
    draw_y_axis(out, panel, frame, y_ticks);
    if (panel.heat_map) draw_heat_scale(out, *panel.heat_map, frame.left + width + 12.0, top, height);
    if (!panel.heat_map) draw_sides(out, panel, frame);
    if (i == 0) draw_flags(out, flags, frame);
    if (i + 1 == chart.panels.size()) draw_x_axis(out, chart, frame, x_ticks, page_height);
    top += height + panel_gap;
  }
  return out.document(page_width, page_height, chart.title, description_of(full));
}

}  // namespace stillmass::report
