#pragma once

#include <cmath>
#include <vector>

#include "stillmass/report/chart.hpp"

namespace stillmass::tests {

/// A spectrum of 20 000 lines, flat but for one line of height 5 at x = 123.45.
inline report::Chart spectrum_chart() {
  std::vector<double> x, y;
  for (int i = 0; i < 20000; ++i) {
    x.push_back(0.05 * i);
    y.push_back(i == 2469 ? 5.0 : 0.01 + 0.005 * std::sin(0.1 * i));
  }
  report::Chart chart;
  chart.title = "Spectrum";
  chart.x = {"Frequency", "Hz"};
  report::Panel panel;
  panel.y = {"Velocity", "mm/s r.m.s."};
  panel.series = {report::series_of("pump-de-h", x, y), report::series_of("pump-de-v", x, y)};
  panel.marks = {{report::Direction::vertical, 24.6, "natural frequency", report::MarkKind::natural_frequency},
                 {report::Direction::horizontal, 2.8, "target", report::MarkKind::limit}};
  panel.zones = {{report::Direction::horizontal, 4.0, {}, "zone C", report::Tone::caution}};
  panel.callouts = {{123.45, 5.0, "5.0 at 123 Hz"}};
  chart.panels = {panel};
  return chart;
}

/// 400 by 300 cells, all 0.001 but for one of 7 at column 200, row 150.
inline report::Chart waterfall_chart() {
  report::HeatMap map;
  for (int i = 0; i < 400; ++i) map.x.push_back(0.5 * i);
  for (int i = 0; i < 300; ++i) map.y.push_back(600.0 + 4.0 * i);
  map.values.assign(400UL * 300UL, 0.001);
  map.values[150UL * 400UL + 200UL] = 7.0;
  map.scale = report::Scale::logarithmic;
  map.label = "Velocity";
  report::Chart chart;
  chart.title = "Waterfall";
  chart.x = {"Frequency", "Hz"};
  report::Panel panel;
  panel.y = {"Speed", "rpm"};
  panel.heat_map = map;
  chart.panels = {panel};
  return chart;
}

}  // namespace stillmass::tests
