#include "report/looks.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "report/palette.hpp"

namespace stillmass::report {

Looks::Looks(const Chart& chart) {
  const auto enter = [&](const std::string& name, Style style, bool band, bool quiet) {
    const auto has_name = [&](const LegendEntry& entry) { return entry.name == name; };
    if (std::any_of(legend_.begin(), legend_.end(), has_name)) return;
    if (!quiet) names_.push_back(name);
    legend_.push_back({name, quiet ? Look{0, "quiet"} : look_of(name), style, band});
  };
  bool heat_map = false;
  for (const Panel& panel : chart.panels) {
    for (const Series& series : panel.series) enter(series.name, series.style, false, series.quiet);
    heat_map = heat_map || panel.heat_map.has_value();
  }
  for (const Panel& panel : chart.panels) {
    for (const Band& band : panel.bands) enter(band.name, Style::line, true, false);
  }
  const bool alone = legend_.size() == 1 && !legend_.front().band && !heat_map;
  std::erase_if(legend_, [&](const LegendEntry& entry) { return alone || entry.name.empty(); });
}

Look Looks::look_of(const std::string& name) const {
  const auto found = std::find(names_.begin(), names_.end(), name);
  const auto index = static_cast<std::size_t>(found - names_.begin());
  return {index, series_role(index)};
}

std::vector<TopLabel> top_labels(const Chart& chart, base::Interval x_range) {
  std::vector<TopLabel> labels;
  const Panel& panel = chart.panels.front();
  const bool logarithmic = chart.x.scale == Scale::logarithmic;
  for (const Mark& mark : panel.marks) {
    const bool drawable = !logarithmic || mark.at > 0.0;
    if (mark.direction == Direction::vertical && !mark.label.empty() && drawable)
      labels.push_back({mark.at, mark.label});
  }
  for (const Zone& zone : panel.zones) {
    if (zone.direction != Direction::vertical || zone.label.empty()) continue;
    const double from = std::max(zone.from.value_or(x_range.lo), x_range.lo);
    const double to = std::min(zone.to.value_or(x_range.hi), x_range.hi);
    if (from < to) labels.push_back({logarithmic ? std::sqrt(from * to) : 0.5 * (from + to), zone.label});
  }
  return labels;
}

std::string_view dash(std::size_t index) {
  static constexpr std::array<std::string_view, series_colours> patterns{"",         "7 3",  "2 2.5",
                                                                         "10 3 2 3", "14 4", "5 2 1 2 1 2"};
  return patterns[index % patterns.size()];
}

}  // namespace stillmass::report
