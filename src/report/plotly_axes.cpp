#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "report/plotly_parts.hpp"

namespace stillmass::report {

namespace {

constexpr double panel_gap = 0.045;  ///< between panels, in parts of the height

/// What both axes have.
void write_axis(JsonText& json, const Axis& axis) {
  const base::Interval range = *axis.range;
  json.key("title").open('{').key("text").text(plain(title_of(axis))).key("standoff").number(8);
  write_font(json, 13.0, "ink");
  json.close('}').key("type").text(axis.scale == Scale::logarithmic ? "log" : "linear");
  json.key("range").open('[').number(on_axis(axis, range.lo)).number(on_axis(axis, range.hi)).close(']');
  json.key("autorange").boolean(false).key("zeroline").boolean(false).key("showline").boolean(true);
  json.key("mirror").text("all").key("ticks").text("").key("ticklabelstandoff").number(4);
  json.key("linecolor").text(colour("frame"));
  json.key("gridcolor").text(colour("grid")).key("automargin").boolean(true);
  const bool short_numbers = axis.scale == Scale::logarithmic && range.lo > 1e-5 && range.hi < 1e6;
  json.key("exponentformat").text(short_numbers ? "none" : "power").key("minexponent").number(5);
  json.key("hoverformat").text(".5~g");
  if (!axis.categories.empty()) {
    json.key("tickmode").text("array").key("tickvals").open('[');
    for (std::size_t i = 0; i < axis.categories.size(); ++i) json.number(static_cast<double>(i));
    json.close(']').key("ticktext").open('[');
    for (const std::string& name : axis.categories) json.text(plain(name));
    json.close(']');
  } else if (axis.tick_step) {
    json.key("dtick").number(*axis.tick_step);
  }
}

}  // namespace

void write_axes(JsonText& json, const Chart& chart) {
  const std::size_t last = chart.panels.size() - 1;
  json.key("xaxis").open('{');
  write_axis(json, chart.x);
  json.key("anchor").text(axis_name(last)).key("domain").open('[').number(0).number(1).close(']');
  json.key("showspikes").boolean(true).key("spikemode").text("across").key("spikesnap").text("cursor");
  json.key("spikethickness").number(1).key("spikedash").text("solid").key("spikecolor").text(colour("frame"));
  json.key("unifiedhovertitle").open('{').key("text");
  json.text(fmt::format("{} %{{x:.6~g}} {}", plain_in_template(chart.x.label), plain_in_template(chart.x.unit)));
  json.close('}').close('}');

  double top = 1.0;
  for (std::size_t i = 0; i <= last; ++i) {
    const double foot = top - share_of_height(chart, i);
    json.key(axis_key(i)).open('{');
    write_axis(json, chart.panels[i].y);
    json.key("domain").open('[').number(i == last ? 0.0 : foot).number(top).close(']').key("anchor").text("x");
    if (chart.equal_scales) json.key("scaleanchor").text("x").key("scaleratio").number(1.0);
    json.close('}');
    top = foot - panel_gap;
  }
}

double share_of_height(const Chart& chart, std::size_t panel) {
  double sum = 0.0;
  for (const Panel& each : chart.panels) sum += each.height;
  const double gaps = panel_gap * static_cast<double>(chart.panels.size() - 1);
  return (1.0 - gaps) * chart.panels[panel].height / sum;
}

}  // namespace stillmass::report
