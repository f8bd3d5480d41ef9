#include "stillmass/report/charts_rotation.hpp"

#include <algorithm>
#include <numeric>

#include "stillmass/base/number.hpp"

namespace stillmass::report {
namespace {

constexpr double to_rpm = 60.0;
constexpr std::size_t speed_points = 400;

}  // namespace

Chart order_chart(const step::RunupResult& result, const std::string& channel) {
  Chart chart;
  chart.title = "Orders at " + channel;
  chart.caption = "Phase: lag from the tacho's edge to the next positive peak.";
  chart.x = {"Speed", "rpm"};
  Panel amplitude;
  Panel phase;
  amplitude.height = 2.0;
  phase.y = {"Phase lag", "deg"};
  phase.y.range = base::Interval{0.0, 360.0};
  phase.y.tick_step = 90.0;
  for (const rotation::OrderTrack& track : result.tracks) {
    if (track.channel != channel || track.value.empty()) continue;
    const base::Unit unit = base::trade_unit(track.quantity);
    amplitude.y = {std::string(base::name(track.quantity)), std::string(unit.name) + " r.m.s."};
    std::vector<std::size_t> by_speed(track.value.size());
    std::iota(by_speed.begin(), by_speed.end(), std::size_t{0});
    std::stable_sort(by_speed.begin(), by_speed.end(),
                     [&](std::size_t a, std::size_t b) { return track.speed_hz[a] < track.speed_hz[b]; });
    std::vector<double> x;
    std::vector<double> y;
    std::vector<double> lag;
    for (const std::size_t i : by_speed) {
      x.push_back(track.speed_hz[i] * to_rpm);
      y.push_back(track.amplitude_rms(i) / unit.to_si);
      lag.push_back(track.phase_lag_deg(i));
    }
    const std::string name = base::plain(track.order) + "x";
    amplitude.series.push_back(series_of(name, x, y));
    phase.series.push_back(series_of(name, x, lag, Style::points));
  }
  for (const step::CriticalSpeedFound& each : result.critical_speeds) {
    if (each.channel != channel) continue;
    const Mark mark{Direction::vertical, each.speed.value * to_rpm,
                    base::plain(each.order) + "x: " + base::rounded(each.speed.value * to_rpm, 4) + " rpm",
                    MarkKind::natural_frequency};
    amplitude.marks.push_back(mark);
    phase.marks.push_back(mark);
  }
  chart.panels = {amplitude, phase};
  return chart;
}

std::optional<Chart> speed_chart(const step::RunupResult& result) {
  if (!result.runup) return {};
  const rotation::SpeedCurve& curve = result.runup->speed;
  const base::Interval turns = curve.turns();
  std::vector<double> x;
  std::vector<double> y;
  const std::size_t points = std::min<std::size_t>(speed_points, static_cast<std::size_t>(turns.width()));
  for (std::size_t i = 0; i < points; ++i) {
    const double from = turns.lo + turns.width() * static_cast<double>(i) / static_cast<double>(points);
    const double to = turns.lo + turns.width() * static_cast<double>(i + 1) / static_cast<double>(points);
    x.push_back(0.5 * (curve.time_at(from) + curve.time_at(to)));
    y.push_back(curve.mean_speed(from, to).value * to_rpm);
  }
  if (x.empty()) return {};
  Chart chart;
  chart.title = "Speed";
  chart.x = {"Time", "s"};
  Panel panel;
  panel.y = {"Speed", "rpm"};
  panel.series.push_back(series_of("speed", x, y));
  chart.panels.push_back(std::move(panel));
  return chart;
}

std::optional<Chart> waterfall_chart(const step::RunupResult& result, const std::string& channel) {
  if (!result.runup) return {};
  for (const rotation::Waterfall& waterfall : result.runup->waterfalls) {
    if (waterfall.channel != channel || waterfall.rows.empty() || waterfall.lines_hz.empty()) continue;
    const base::Unit unit = base::trade_unit(waterfall.quantity);
    HeatMap map;
    map.label = std::string(base::name(waterfall.quantity));
    map.unit = std::string(unit.name) + " r.m.s.";
    map.scale = Scale::logarithmic;
    map.x = waterfall.lines_hz;
    double highest = 0.0;
    for (const rotation::WaterfallRow& row : waterfall.rows) {
      map.y.push_back(row.time_s);
      for (const double value : row.amplitude) {
        map.values.push_back(value / unit.to_si);
        highest = std::max(highest, value / unit.to_si);
      }
    }
    if (highest > 0.0) map.range = base::Interval{highest * 1e-4, highest};
    Chart chart;
    chart.title = "Waterfall at " + channel;
    chart.caption =
        "Spectra against time; lines " + base::plain(waterfall.resolution_hz, 3) + " Hz apart before reduction.";
    chart.x = {"Frequency", "Hz"};
    Panel panel;
    panel.y = {"Time", "s"};
    panel.height = 2.0;
    panel.heat_map = std::move(map);
    chart.panels.push_back(std::move(panel));
    return chart;
  }
  return {};
}

}  // namespace stillmass::report
