#include "stillmass/report/charts_modes.hpp"

#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/number.hpp"

namespace stillmass::report {
namespace {

void mark_modes(Panel& panel, const std::vector<modal::Mode>& modes, base::Interval shown) {
  for (const modal::Mode& mode : modes) {
    const double at = mode.frequency.value;
    if (!shown.contains(at)) continue;
    panel.marks.push_back({Direction::vertical, at, base::rounded(at, 4) + " Hz", MarkKind::natural_frequency});
  }
}

}  // namespace

std::optional<Chart> response_chart(const step::BumpResult& result, std::size_t response) {
  if (!result.impact || response >= result.impact->responses.size()) return {};
  const modal::ImpactTest& test = *result.impact;
  const modal::AveragedResponse& measured = test.responses[response];
  std::vector<double> f;
  std::vector<double> magnitude;
  std::vector<double> phase;
  std::vector<double> coherence;
  std::vector<double> f_fit;
  std::vector<double> fitted;
  for (std::size_t k = 1; k < measured.accelerance.size(); ++k) {
    const double frequency = static_cast<double>(k) * test.line_hz;
    if (frequency > test.band_hz.hi) break;
    f.push_back(frequency);
    magnitude.push_back(std::abs(measured.accelerance[k]));
    phase.push_back(std::arg(measured.accelerance[k]) * 180.0 / std::numbers::pi);
    if (!measured.coherence.empty()) coherence.push_back(measured.coherence[k]);
    if (k < measured.fitted.size() && std::abs(measured.fitted[k]) > 0.0) {
      f_fit.push_back(frequency);
      fitted.push_back(std::abs(measured.fitted[k]));
    }
  }
  if (f.empty()) return {};
  Chart chart;
  chart.title = "Frequency response at " + measured.channel;
  chart.caption = fmt::format("Acceleration over force, {} blow{}, lines {} Hz apart.", test.hits,
                              test.hits == 1 ? "" : "s", base::plain(test.line_hz, 3));
  chart.x = {"Frequency", "Hz"};
  chart.x.range = base::Interval{0.0, test.band_hz.hi};
  const base::Interval shown{0.0, test.band_hz.hi};

  Panel strength;
  strength.y = {"Accelerance", "(m/s\xC2\xB2)/N", Scale::logarithmic};
  strength.height = 2.0;
  strength.series.push_back(series_of("measured", f, magnitude));
  if (!fitted.empty()) strength.series.push_back(series_of("fitted", f_fit, fitted));
  mark_modes(strength, result.modes, shown);
  chart.panels.push_back(std::move(strength));

  Panel angle;
  angle.y = {"Phase", "deg"};
  angle.y.range = base::Interval{-180.0, 180.0};
  angle.y.tick_step = 90.0;
  angle.series.push_back(series_of("phase", f, phase));
  mark_modes(angle, result.modes, shown);
  chart.panels.push_back(std::move(angle));

  if (!coherence.empty()) {
    Panel trust;
    trust.y = {"Coherence", ""};
    trust.y.range = base::Interval{0.0, 1.0};
    trust.height = 0.7;
    trust.series.push_back(series_of("coherence", f, coherence));
    mark_modes(trust, result.modes, shown);
    chart.panels.push_back(std::move(trust));
  }
  return chart;
}

std::optional<Chart> ring_down_chart(const step::BumpResult& result) {
  if (!result.ring_down || result.ring_down->amplitude.empty()) return {};
  const modal::RingDownTest& test = *result.ring_down;
  std::vector<double> f;
  for (std::size_t k = 0; k < test.amplitude.size(); ++k) f.push_back(static_cast<double>(k) * test.line_hz);
  Chart chart;
  chart.title = "Mean spectrum of the ring-downs";
  chart.x = {"Frequency", "Hz"};
  Panel panel;
  panel.y = {"Magnitude", "", Scale::logarithmic};
  panel.series.push_back(series_of("measured", f, test.amplitude));
  mark_modes(panel, result.modes, {0.0, f.back()});
  chart.panels.push_back(std::move(panel));
  return chart;
}

}  // namespace stillmass::report
