#include <algorithm>
#include <cmath>
#include <set>

#include <fmt/format.h>

#include "report/plotly_parts.hpp"

namespace stillmass::report {

namespace {

constexpr int digits_of_values = 5;

/// Numbers of the segments in a row, a null between two of them. A value that a logarithmic axis has no place for is a
/// null, too.
void write_joined(JsonText& json, const Series& series, std::vector<double> Segment::*member, Scale scale, int digits) {
  json.open('[');
  for (std::size_t s = 0; s < series.segments.size(); ++s) {
    if (s > 0) json.null();
    for (const double value : series.segments[s].*member) {
      if (scale == Scale::logarithmic && value <= 0.0) {
        json.null();
      } else {
        json.number(value, digits);
      }
    }
  }
  json.close(']');
}

/// Writes the traces of one chart and remembers which names the legend has already.
class TraceWriter {
 public:
  TraceWriter(JsonText& json, const Chart& chart, const Looks& looks) : json_(json), chart_(chart), looks_(looks) {}

  void write(std::size_t index) {
    const Panel& panel = chart_.panels[index];
    if (panel.heat_map) write_heat_map(*panel.heat_map, index);
    for (const Band& band : panel.bands) write_band(band, panel, index);
    for (const Series& series : panel.series) write_series(series, panel, index);
  }
  const std::vector<int>& log_maps() const { return log_maps_; }

 private:
  void open(const char* type, std::size_t panel) {
    json_.open('{').key("type").text(type).key("xaxis").text("x").key("yaxis").text(axis_name(panel));
    ++count_;
  }

  void write_name(const std::string& name) {
    const bool listed = std::any_of(looks_.legend().begin(), looks_.legend().end(),
                                    [&](const LegendEntry& entry) { return entry.name == name; });
    json_.key("name").text(plain(name.empty() ? chart_.title : name)).key("legendgroup").text(plain(name));
    json_.key("showlegend").boolean(listed && named_.insert(name).second);
  }

  void write_read_out(const Panel& panel) {
    const std::string unit = plain_in_template(panel.y.unit);
    json_.key("hovertemplate").text(unit.empty() ? "%{y:.4~g}" : "%{y:.4~g} " + unit);
  }

  void write_series(const Series& series, const Panel& panel, std::size_t index) {
    const Look look = looks_.of(series);
    const bool bars = series.style == Style::bars;
    if (series.style == Style::stems) write_stalks(series, panel, index, look);
    open(bars ? "bar" : "scatter", index);
    write_name(series.name);
    write_read_out(panel);
    json_.key("x");
    write_joined(json_, series, &Segment::x, chart_.x.scale, 7);
    json_.key("y");
    write_joined(json_, series, &Segment::y, panel.y.scale, digits_of_values);
    if (!bars) write_pen(series, look);
    if (bars) json_.key("marker").open('{').key("color").text(colour(look.role)).close('}');
    if (!series.error.empty()) {
      json_.key("error_y").open('{').key("type").text("data").key("array").numbers(series.error, digits_of_values);
      json_.key("color").text(colour("ink")).key("thickness").number(1.2).key("width").number(5).close('}');
    }
    json_.close('}');
  }

  void write_pen(const Series& series, const Look& look) {
    static constexpr const char* symbols[] = {"circle", "square", "diamond", "triangle-up", "triangle-down", "cross"};
    const bool dots = series.style == Style::points || series.style == Style::stems;
    const bool single = std::any_of(series.segments.begin(), series.segments.end(),
                                    [](const Segment& segment) { return segment.x.size() == 1; });
    json_.key("mode").text(dots ? "markers" : single ? "lines+markers" : "lines");
    json_.key("connectgaps").boolean(false);
    json_.key("marker").open('{').key("color").text(colour(look.role)).key("size").number(dots ? 7 : 4);
    json_.key("symbol").text(symbols[look.index % std::size(symbols)]).close('}');
    json_.key("line").open('{').key("color").text(colour(look.role)).key("width").number(series.quiet ? 1.0 : 1.6);
    if (series.style == Style::step) json_.key("shape").text("hv");
    json_.close('}');
  }

  /// The lines of stems, from the foot of the panel.
  void write_stalks(const Series& series, const Panel& panel, std::size_t index, const Look& look) {
    const double foot = panel.y.scale == Scale::logarithmic ? panel.y.range->lo : panel.y.range->clamped(0.0);
    open("scatter", index);
    json_.key("mode").text("lines").key("hoverinfo").text("skip").key("showlegend").boolean(false);
    json_.key("legendgroup").text(plain(series.name)).key("x").open('[');
    for (const Segment& segment : series.segments) {
      for (const double x : segment.x) json_.number(x).number(x).null();
    }
    json_.close(']').key("y").open('[');
    for (const Segment& segment : series.segments) {
      for (const double y : segment.y) json_.number(foot).number(y, digits_of_values).null();
    }
    json_.close(']').key("line").open('{').key("color").text(colour(look.role)).key("width").number(1.6).close('}');
    json_.close('}');
  }

  /// Out along the upper edge and back along the lower.
  void write_band(const Band& band, const Panel& panel, std::size_t index) {
    constexpr double beside_series = 0.22;
    constexpr double alone = 0.6;
    const bool logarithmic = panel.y.scale == Scale::logarithmic;
    const double least = logarithmic ? 1e-3 * panel.y.range->lo : 0.0;
    const auto drawable = [&](double value) { return logarithmic ? std::max(value, least) : value; };
    open("scatter", index);
    write_name(band.name);
    json_.key("mode").text("lines").key("hoverinfo").text("skip").key("fill").text("toself");
    json_.key("x").open('[');
    for (const double x : band.x) json_.number(x);
    for (auto x = band.x.rbegin(); x != band.x.rend(); ++x) json_.number(*x);
    json_.close(']').key("y").open('[');
    for (const double high : band.high) json_.number(drawable(high), digits_of_values);
    for (auto low = band.low.rbegin(); low != band.low.rend(); ++low) json_.number(drawable(*low), digits_of_values);
    json_.close(']').key("fillcolor").text(colour(looks_.of(band).role, panel.series.empty() ? alone : beside_series));
    json_.key("line").open('{').key("width").number(0).close('}').close('}');
  }

  void write_heat_map(const HeatMap& map, std::size_t index) {
    const bool logarithmic = map.scale == Scale::logarithmic;
    if (logarithmic) log_maps_.push_back(count_);
    const base::Interval range = colour_range(map);
    const auto scaled = [&](double value) { return logarithmic ? std::log10(value) : value; };
    open("heatmap", index);
    json_.key("x").numbers(map.x).key("y").numbers(map.y).key("z").open('[');
    for (std::size_t row = 0; row < map.y.size(); ++row) {
      json_.numbers(std::span(map.values).subspan(row * map.x.size(), map.x.size()), 4);
    }
    json_.close(']').key("zmin").number(scaled(range.lo)).key("zmax").number(scaled(range.hi));
    json_.key("colorscale").open('[');
    json_.open('[').number(0).text(colour("heat", 0.0)).close(']');
    json_.open('[').number(1).text(colour("heat", 1.0)).close(']').close(']');
    const std::string unit = plain_in_template(map.unit);
    json_.key("hovertemplate")
        .text(fmt::format("{} %{{x:.5~g}} {}<br>{} %{{y:.5~g}} {}<br>{} %{{{}:.3~g}} {}<extra></extra>",
                          plain_in_template(chart_.x.label), plain_in_template(chart_.x.unit),
                          plain_in_template(chart_.panels[index].y.label),
                          plain_in_template(chart_.panels[index].y.unit), plain_in_template(map.label),
                          logarithmic ? "customdata" : "z", unit));
    write_colour_bar(map, range);
    json_.close('}');
  }

  void write_colour_bar(const HeatMap& map, base::Interval range) {
    Axis axis;
    axis.label = map.label;
    axis.unit = map.unit;
    axis.scale = map.scale;
    const std::vector<Tick> marks = ticks(axis, range, 5);
    json_.key("colorbar").open('{').key("thickness").number(12).key("outlinewidth").number(0);
    json_.key("title").open('{').key("text").text(plain(title_of(axis))).key("side").text("right");
    json_.key("font")
        .open('{')
        .key("size")
        .number(12)
        .close('}')
        .close('}')
        .key("tickfont")
        .open('{')
        .key("size")
        .number(11)
        .close('}');
    json_.key("tickmode").text("array").key("tickvals").open('[');
    for (const Tick& tick : marks) json_.number(map.scale == Scale::logarithmic ? std::log10(tick.at) : tick.at);
    json_.close(']').key("ticktext").open('[');
    for (const Tick& tick : marks) json_.text(plain(tick.text));
    json_.close(']').close('}');
  }

  JsonText& json_;
  const Chart& chart_;
  const Looks& looks_;
  std::set<std::string> named_;
  std::vector<int> log_maps_;
  int count_ = 0;
};

}  // namespace

std::vector<int> write_traces(JsonText& json, const Chart& chart, const Looks& looks) {
  TraceWriter writer(json, chart, looks);
  for (std::size_t i = 0; i < chart.panels.size(); ++i) writer.write(i);
  return writer.log_maps();
}

}  // namespace stillmass::report
