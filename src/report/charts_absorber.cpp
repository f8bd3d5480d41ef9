#include "stillmass/report/charts_absorber.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>

#include "stillmass/base/number.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::report {
namespace {

constexpr int points = 1200;
constexpr double from_ratio = 0.6;
constexpr double to_ratio = 1.5;
constexpr int cases = 21;  // of the natural frequency, over +-2 u

// |velocity over force|, (mm/s)/N.
double mobility(const modal::OneMode& machine, const modal::SprungMass* absorber, double f) {
  const std::complex<double> h = machine.receptance(f);
  const std::complex<double> x = absorber == nullptr ? h : h * modal::response_ratio(h, absorber->dynamic_stiffness(f));
  return std::abs(x) * 2.0 * std::numbers::pi * f * 1e3;
}

}  // namespace

std::optional<Chart> absorber_chart(const step::AbsorberResult& result) {
  const auto machine = modal::plain(result.question.mode);
  if (!machine || !result.specification) return {};
  const auto& data =
      result.specification->absorber ? result.specification->absorber : result.specification->best_possible;
  if (!data) return {};
  const modal::SprungMass absorber{data->mass_kg, data->frequency_hz, data->damping_ratio};
  const double u = result.question.mode.frequency.u.value_or(0.0);

  std::vector<double> x;
  std::vector<double> without;
  std::vector<double> with;
  Band uncertain;
  uncertain.name = "with it, natural frequency uncertain by 2 u";
  for (int i = 0; i <= points; ++i) {
    const double f = machine->frequency_hz * (from_ratio + (to_ratio - from_ratio) * i / points);
    x.push_back(f);
    without.push_back(mobility(*machine, nullptr, f));
    with.push_back(mobility(*machine, &absorber, f));
    if (u <= 0.0) continue;
    double low = with.back();
    double high = with.back();
    for (int c = 0; c < cases; ++c) {
      modal::OneMode other = *machine;
      other.frequency_hz += u * (4.0 * c / (cases - 1) - 2.0);
      const double value = mobility(other, &absorber, f);
      low = std::min(low, value);
      high = std::max(high, value);
    }
    uncertain.x.push_back(f);
    uncertain.low.push_back(low);
    uncertain.high.push_back(high);
  }
  Chart chart;
  chart.title = "What the absorber does";
  chart.caption = "Velocity at the attachment point for each newton of force, by the model of one mode.";
  chart.x = {"Frequency", "Hz"};
  Panel panel;
  panel.y = {"Velocity over force", "(mm/s)/N", Scale::logarithmic};
  panel.series.push_back(series_of("without", x, without));
  panel.series.push_back(series_of("with the absorber", x, with));
  if (!uncertain.x.empty()) panel.bands.push_back(std::move(uncertain));
  const base::Interval range = result.question.forcing.range_hz;
  if (range.width() > 0.02 * range.middle()) {
    panel.zones.push_back({Direction::vertical, range.lo, range.hi, "forcing", Tone::neutral});
  } else {
    panel.marks.push_back({Direction::vertical, range.middle(), "forcing " + base::rounded(range.middle(), 4) + " Hz",
                           MarkKind::forcing_frequency});
  }
  for (const double split : data->split_frequencies_hz) {
    panel.marks.push_back({Direction::vertical, split, base::rounded(split) + " Hz", MarkKind::natural_frequency});
  }
  chart.panels.push_back(std::move(panel));
  return chart;
}

std::optional<Chart> tuning_chart(const step::AbsorberResult& result) {
  if (!result.specification || result.specification->tuning.empty()) return {};
  std::vector<double> x;
  std::vector<double> y;
  for (const absorber::TuningPoint& point : result.specification->tuning) {
    x.push_back(point.free_length_m * 1e3);
    y.push_back(point.frequency_hz);
  }
  if (x.size() > 1 && x.front() > x.back()) {
    std::reverse(x.begin(), x.end());
    std::reverse(y.begin(), y.end());
  }
  Chart chart;
  chart.title = "Tuning chart";
  chart.caption = "The absorber alone on a stiff clamp. A shorter blade is a higher frequency.";
  chart.x = {"Free length of the blade", "mm"};
  Panel panel;
  panel.y = {"Frequency on a clamp", "Hz"};
  panel.series.push_back(series_of("frequency", x, y));
  if (result.specification->absorber) {
    const double wanted = result.specification->absorber->frequency_hz;
    panel.marks.push_back(
        {Direction::horizontal, wanted, "tune to " + base::rounded(wanted, 4) + " Hz", MarkKind::limit});
  }
  chart.panels.push_back(std::move(panel));
  return chart;
}

}  // namespace stillmass::report
