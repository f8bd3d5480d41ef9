#include "stillmass/report/chart.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::report {

namespace {

bool all_finite(std::span<const double> values) {
  return std::all_of(values.begin(), values.end(), [](double v) { return std::isfinite(v); });
}

/// Says which rule a chart breaks.
class Rules {
 public:
  explicit Rules(const std::string& title) : title_(title) {}

  void require(bool holds, const char* rule) const {
    if (!holds) throw base::Error(base::ErrorKind::internal, "chart \"" + title_ + "\"", rule);
  }

  void range(const std::optional<base::Interval>& range, Scale scale) const {
    if (!range) return;
    require(std::isfinite(range->lo) && std::isfinite(range->hi) && range->lo < range->hi,
            "a range is not two finite numbers that rise");
    require(scale == Scale::linear || range->lo > 0.0, "the range of a logarithmic axis is not positive");
  }

  void axis(const Axis& axis) const {
    range(axis.range, axis.scale);
    require(!axis.tick_step || (std::isfinite(*axis.tick_step) && *axis.tick_step > 0.0),
            "a tick step is not positive");
  }

 private:
  const std::string& title_;
};

void check_series(const Rules& rules, const Series& series) {
  for (const Segment& segment : series.segments) {
    rules.require(segment.x.size() == segment.y.size(), "x and y of a series differ in length");
    rules.require(all_finite(segment.x) && all_finite(segment.y), "a series holds a number that is not finite");
  }
  if (series.error.empty()) return;
  rules.require(series.style == Style::points || series.style == Style::bars, "error bars belong to points or bars");
  rules.require(series.segments.size() == 1 && series.segments.front().x.size() == series.error.size(),
                "error bars and points differ in number");
  rules.require(all_finite(series.error), "an error bar is not finite");
}

void check_heat_map(const Rules& rules, const HeatMap& map) {
  rules.require(!map.x.empty() && !map.y.empty() && map.values.size() == map.x.size() * map.y.size(),
                "a heat map's values do not fit its grid");
  rules.require(all_finite(map.x) && all_finite(map.y) && all_finite(map.values),
                "a heat map holds a number that is not finite");
  rules.require(std::is_sorted(map.x.begin(), map.x.end()) && std::is_sorted(map.y.begin(), map.y.end()),
                "a heat map's grid does not rise");
  rules.range(map.range, map.scale);
}

std::string list_of(const std::vector<std::string>& words) {
  std::string text;
  for (std::size_t i = 0; i < words.size(); ++i) {
    if (i > 0) text += i + 1 == words.size() ? " and " : ", ";
    text += words[i];
  }
  return text;
}

/// "Velocity against Frequency (Hz): pump-de-h, pump-nde-h. Marked: 1x."
std::string sentence_of(const Chart& chart) {
  std::vector<std::string> quantities, names, marks;
  const auto add = [](std::vector<std::string>& list, const std::string& word) {
    if (!word.empty() && std::find(list.begin(), list.end(), word) == list.end()) list.push_back(word);
  };
  for (const Panel& panel : chart.panels) {
    add(quantities, panel.heat_map ? panel.heat_map->label + " over " + panel.y.label : title_of(panel.y));
    for (const Series& series : panel.series) add(names, series.name);
    for (const Mark& mark : panel.marks) add(marks, mark.label);
  }
  std::string text = fmt::format("{}. {} against {}", chart.title, list_of(quantities), title_of(chart.x));
  if (!names.empty()) text += ": " + list_of(names);
  text += '.';
  if (!marks.empty()) text += " Marked: " + list_of(marks) + '.';
  return text;
}

}  // namespace

std::vector<Segment> segments_of(std::span<const double> x, std::span<const double> y) {
  std::vector<Segment> segments;
  bool open = false;
  for (std::size_t i = 0; i < std::min(x.size(), y.size()); ++i) {
    if (!std::isfinite(x[i]) || !std::isfinite(y[i])) {
      open = false;
      continue;
    }
    if (!open) segments.emplace_back();
    open = true;
    segments.back().x.push_back(x[i]);
    segments.back().y.push_back(y[i]);
  }
  return segments;
}

Series series_of(std::string name, std::span<const double> x, std::span<const double> y, Style style) {
  Series series;
  series.name = std::move(name);
  series.style = style;
  series.segments = segments_of(x, y);
  return series;
}

void check(const Chart& chart) {
  const Rules rules(chart.title);
  rules.require(!chart.panels.empty(), "there is no panel");
  rules.axis(chart.x);
  for (const Panel& panel : chart.panels) {
    rules.axis(panel.y);
    rules.require(std::isfinite(panel.height) && panel.height > 0.0, "a panel's height is not positive");
    for (const Series& series : panel.series) check_series(rules, series);
    for (const Band& band : panel.bands) {
      rules.require(band.x.size() == band.low.size() && band.x.size() == band.high.size(),
                    "the edges of a band differ in length");
      rules.require(all_finite(band.x) && all_finite(band.low) && all_finite(band.high),
                    "a band holds a number that is not finite");
    }
    for (const Mark& mark : panel.marks) rules.require(std::isfinite(mark.at), "a mark is not finite");
    for (const Zone& zone : panel.zones) {
      rules.require(std::isfinite(zone.from.value_or(0.0)) && std::isfinite(zone.to.value_or(0.0)),
                    "a zone's end is not finite");
    }
    for (const Callout& callout : panel.callouts) {
      rules.require(std::isfinite(callout.x) && std::isfinite(callout.y), "a callout is not finite");
    }
    if (panel.heat_map) check_heat_map(rules, *panel.heat_map);
  }
}

std::string title_of(const Axis& axis) {
  return axis.unit.empty() ? axis.label : fmt::format("{} ({})", axis.label, axis.unit);
}

std::string description_of(const Chart& chart) {
  return chart.description.empty() ? sentence_of(chart) : chart.description;
}

}  // namespace stillmass::report
