#include "stillmass/report/plotly.hpp"

#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/text.hpp"
#include "stillmass/report/reduce.hpp"

#include "report/plotly_parts.hpp"

namespace stillmass::report {

namespace {

void write_config(JsonText& json, const Chart& chart) {
  json.key("config").open('{');
  json.key("responsive").boolean(true).key("displaylogo").boolean(false).key("showTips").boolean(false);
  json.key("showSendToCloud").boolean(false).key("plotlyServerURL").text("").key("displayNotifier").boolean(false);
  json.key("doubleClick").text("reset").key("scrollZoom").boolean(false);
  json.key("modeBarButtonsToRemove").open('[').text("lasso2d").text("select2d").text("autoScale2d").close(']');
  json.key("toImageButtonOptions").open('{').key("format").text("png").key("scale").number(2.0);
  json.key("filename").text(base::safe_file_name(base::lower(chart.title))).close('}');
  json.close('}');
}

/// What page.js needs beyond the library: labels over the panels (their rows depend on the width of the window), heat
/// maps to be drawn by logarithm, the height.
void write_meta(JsonText& json, const Chart& chart, const std::vector<int>& log_maps) {
  json.key("meta").open('{').key("height").number(screen_height(chart));
  json.key("logX").boolean(chart.x.scale == Scale::logarithmic);
  json.key("logMaps").open('[');
  for (const int trace : log_maps) json.number(trace);
  json.close(']').key("flags").open('[');
  for (const TopLabel& label : top_labels(chart, *chart.x.range)) {
    json.open('{').key("at").number(label.x).key("text").text(plain(label.text)).close('}');
  }
  json.close(']').close('}');
}

std::string with_entities(std::string_view text, bool percent) {
  std::string out;
  for (const char c : text) {
    if (c == '&') {
      out += "&amp;";
    } else if (c == '<') {
      out += "&lt;";
    } else if (c == '>') {
      out += "&gt;";
    } else if (c == '%' && percent) {
      out += "&#37;";
    } else {
      out += c;
    }
  }
  return out;
}

}  // namespace

std::string plain(std::string_view text) { return with_entities(text, false); }
std::string plain_in_template(std::string_view text) { return with_entities(text, true); }

std::string colour(std::string_view role) { return fmt::format("role:{}", role); }
std::string colour(std::string_view role, double opacity) { return fmt::format("role:{}/{:.3g}", role, opacity); }
std::string axis_name(std::size_t panel) { return panel == 0 ? "y" : fmt::format("y{}", panel + 1); }
std::string axis_key(std::size_t panel) { return panel == 0 ? "yaxis" : fmt::format("yaxis{}", panel + 1); }

void write_font(JsonText& json, double size, std::string_view role) {
  json.key("font").open('{').key("size").number(size).key("color").text(colour(role)).close('}');
}

double on_axis(const Axis& axis, double value) { return axis.scale == Scale::logarithmic ? std::log10(value) : value; }

bool has_place(const Axis& axis, double value) { return axis.scale == Scale::linear || value > 0.0; }

std::string plotly_json(const Chart& full) {
  check(full);
  Chart chart = reduced(full, 800, 320, 120);
  // The frame belongs to the whole data, not to the reduced ones.
  chart.x.range = x_range(full);
  for (std::size_t i = 0; i < chart.panels.size(); ++i) chart.panels[i].y.range = y_range(full, full.panels[i]);
  const Looks looks(chart);
  JsonText json;
  json.open('{').key("data").open('[');
  const std::vector<int> log_maps = write_traces(json, chart, looks);
  json.close(']');
  json.key("layout");
  write_layout(json, chart, looks);
  write_config(json, chart);
  write_meta(json, chart, log_maps);
  return json.close('}').str();
}

}  // namespace stillmass::report
