#include "report/svg_heat.hpp"

#include <algorithm>
#include <array>
#include <vector>

#include <fmt/format.h>

namespace stillmass::report {

namespace {

double opacity_of(int level) { return static_cast<double>(level) / (heat_levels - 1); }

/// Places of the edges of cells, half way between their centres.
std::vector<double> edges(const std::vector<double>& centres, const Ruler& ruler) {
  std::vector<double> places;
  const std::size_t n = centres.size();
  for (std::size_t i = 0; i <= n; ++i) {
    double edge = 0.0;
    if (n == 1) {
      edge = centres[0] + (i == 0 ? -0.5 : 0.5);
    } else if (i == 0) {
      edge = centres[0] - 0.5 * (centres[1] - centres[0]);
    } else if (i == n) {
      edge = centres[n - 1] + 0.5 * (centres[n - 1] - centres[n - 2]);
    } else {
      edge = 0.5 * (centres[i - 1] + centres[i]);
    }
    places.push_back(ruler(ruler.has(edge) ? edge : ruler.range().lo));
  }
  return places;
}

Axis axis_of(const HeatMap& map) {
  Axis axis;
  axis.label = map.label;
  axis.unit = map.unit;
  axis.scale = map.scale;
  return axis;
}

}  // namespace

int heat_level(double value, Scale scale, base::Interval range) {
  const Ruler darkness(scale, range, 0.0, heat_levels - 1);
  if (!darkness.has(value)) return 0;
  return static_cast<int>(std::lround(std::clamp(darkness(value), 0.0, heat_levels - 1.0)));
}

void draw_heat_map(SvgWriter& out, const HeatMap& map, const Ruler& x, const Ruler& y) {
  const base::Interval range = colour_range(map);
  const std::vector<double> columns = edges(map.x, x), rows = edges(map.y, y);
  std::array<std::string, heat_levels> paths;
  for (std::size_t row = 0; row < map.y.size(); ++row) {
    const double top = std::min(rows[row], rows[row + 1]), height = std::abs(rows[row + 1] - rows[row]);
    for (std::size_t begin = 0; begin < map.x.size();) {
      const auto level_at = [&](std::size_t column) {
        return heat_level(map.values[row * map.x.size() + column], map.scale, range);
      };
      const int level = level_at(begin);
      std::size_t end = begin + 1;
      while (end < map.x.size() && level_at(end) == level) ++end;
      if (level > 0) {
        paths[static_cast<std::size_t>(level)] += fmt::format("M{} {}H{}v{}H{}z", px(columns[begin]), px(top),
                                                              px(columns[end]), px(height), px(columns[begin]));
      }
      begin = end;
    }
  }
  out.raw("<g shape-rendering=\"crispEdges\">\n");
  for (int level = 1; level < heat_levels; ++level) {
    const std::string& path = paths[static_cast<std::size_t>(level)];
    if (!path.empty()) out.fill(path, "heat", opacity_of(level));
  }
  out.raw("</g>\n");
}

void draw_heat_scale(SvgWriter& out, const HeatMap& map, double left, double top, double height) {
  constexpr double width = 14.0;
  const double step = height / heat_levels;
  for (int level = 0; level < heat_levels; ++level) {
    out.rectangle(left, top + height - (level + 1) * step, width, step + 0.3, "heat", opacity_of(level));
  }
  out.frame(left, top, width, height, {"frame", 1.0});
  const Axis axis = axis_of(map);
  const base::Interval range = colour_range(map);
  const Ruler ruler(map.scale, range, top + height, top);
  double widest = 0.0;
  for (const Tick& tick : ticks(axis, range, 5)) {
    out.text(left + width + 5.0, ruler(tick.at) + 4.0, tick.text, Anchor::start, 11.0);
    widest = std::max(widest, text_width(tick.text, 11.0));
  }
  out.upright_text(left + width + 18.0 + widest, top + 0.5 * height, title_of(axis), 11.0);
}

}  // namespace stillmass::report
