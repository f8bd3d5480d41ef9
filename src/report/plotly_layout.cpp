#include <algorithm>

#include "report/palette.hpp"
#include "report/plotly_parts.hpp"
#include "report/svg_panel.hpp"

namespace stillmass::report {

namespace {

/// A range that reaches far beyond what is in sight, however one moves about.
base::Interval far_beyond(const Axis& axis) {
  const base::Interval range = *axis.range;
  if (axis.scale == Scale::logarithmic) return {1e-6 * range.lo, 1e6 * range.hi};
  return {range.lo - 9.0 * range.width(), range.hi + 9.0 * range.width()};
}

void open_shape(JsonText& json, const char* type, const char* layer, bool upright, const std::string& y_ref) {
  json.open('{').key("type").text(type).key("layer").text(layer);
  json.key("xref").text(upright ? "x" : "x domain").key("yref").text(y_ref);
}

void write_corners(JsonText& json, base::Interval x, base::Interval y) {
  json.key("x0").number(x.lo).key("x1").number(x.hi).key("y0").number(y.lo).key("y1").number(y.hi);
}

void write_zone(JsonText& json, const Zone& zone, const Chart& chart, std::size_t index) {
  const bool across = zone.direction == Direction::horizontal;
  const Axis& axis = across ? chart.panels[index].y : chart.x;
  base::Interval extent = far_beyond(axis);
  if (zone.from && has_place(axis, *zone.from)) extent.lo = *zone.from;
  if (zone.to) extent.hi = *zone.to;
  if (!has_place(axis, extent.hi)) return;
  const std::string y = axis_name(index);
  open_shape(json, "rect", "below", !across, across ? y : y + " domain");
  write_corners(json, across ? base::Interval{0.0, 1.0} : extent, across ? extent : base::Interval{0.0, 1.0});
  json.key("fillcolor").text(colour(role_of(zone.tone), zone.tone == Tone::neutral ? 0.15 : 0.13));
  json.key("line").open('{').key("width").number(0).close('}').close('}');
}

/// Upright marks stand behind the data, so that a peak on its mark stays in sight, but over a heat map; limits lie over
/// everything.
void write_mark(JsonText& json, const Mark& mark, const Chart& chart, std::size_t index) {
  const bool upright = mark.direction == Direction::vertical;
  const Panel& panel = chart.panels[index];
  if (!has_place(upright ? chart.x : panel.y, mark.at)) return;
  const base::Interval at{mark.at, mark.at};
  open_shape(json, "line", upright && !panel.heat_map ? "between" : "above", upright, axis_name(index));
  write_corners(json, upright ? at : base::Interval{0.0, 1.0}, upright ? far_beyond(panel.y) : at);
  const Stroke stroke = stroke_of(mark.kind);
  std::string dash(stroke.dash);
  std::replace(dash.begin(), dash.end(), ' ', ',');
  json.key("line").open('{').key("color").text(colour(stroke.role)).key("width").number(stroke.width);
  json.key("dash").text(dash.empty() ? "solid" : dash).close('}').close('}');
}

/// A vertical cursor through all panels, except where x is not what one reads at.
bool reads_at_x(const Chart& chart) {
  return !chart.equal_scales && std::none_of(chart.panels.begin(), chart.panels.end(),
                                             [](const Panel& panel) { return panel.heat_map.has_value(); });
}

}  // namespace

double screen_height(const Chart& chart) {
  if (chart.equal_scales) return 520.0;
  return 140.0 + 240.0 * std::min(2.5, 0.35 + 0.65 * static_cast<double>(chart.panels.size()));
}

void write_layout(JsonText& json, const Chart& chart, const Looks& looks) {
  json.open('{');
  json.key("paper_bgcolor").text(colour("paper")).key("plot_bgcolor").text(colour("paper"));
  json.key("font").open('{').key("family").text("system-ui, 'Liberation Sans', Arial, sans-serif");
  json.key("size").number(13).key("color").text(colour("ink")).close('}');
  json.key("margin").open('{').key("l").number(56).key("r").number(right_margin(chart));
  json.key("t").number(12).key("b").number(48).close('}');
  json.key("showlegend").boolean(!looks.legend().empty());
  json.key("legend").open('{').key("orientation").text("h").key("yref").text("container").key("y").number(1.0);
  json.key("yanchor").text("top").key("x").number(0.0).key("xanchor").text("left").key("bgcolor").text("rgba(0,0,0,0)");
  json.close('}');
  json.key("bargap").number(0.45).key("hoversubplots").text("axis");
  json.key("hovermode").text(reads_at_x(chart) ? "x unified" : "closest");
  json.key("hoverlabel").open('{').key("bgcolor").text(colour("paper", 0.94)).key("bordercolor").text(colour("frame"));
  write_font(json, 12.0, "ink");
  json.close('}');
  write_axes(json, chart);
  json.key("shapes").open('[');
  for (std::size_t i = 0; i < chart.panels.size(); ++i) {
    for (const Zone& zone : chart.panels[i].zones) write_zone(json, zone, chart, i);
    for (const Mark& mark : chart.panels[i].marks) write_mark(json, mark, chart, i);
  }
  json.close(']').key("annotations").open('[');
  write_notes(json, chart);
  json.close(']').close('}');
}

}  // namespace stillmass::report
