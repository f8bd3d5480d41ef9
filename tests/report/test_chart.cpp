#include <cmath>
#include <limits>

#include "stillmass/base/error.hpp"
#include "stillmass/report/chart.hpp"

#include "report/sample_charts.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;

namespace {

std::vector<std::string> texts(const std::vector<Tick>& ticks) {
  std::vector<std::string> found;
  for (const Tick& tick : ticks) found.push_back(tick.text);
  return found;
}

Axis axis(Scale scale) {
  Axis found;
  found.scale = scale;
  return found;
}

Chart one_series(std::vector<double> x, std::vector<double> y, Scale scale = Scale::linear) {
  Chart chart;
  chart.title = "one";
  chart.panels.resize(1);
  chart.panels[0].y.scale = scale;
  chart.panels[0].series = {series_of("a", x, y)};
  return chart;
}

}  // namespace

TEST_CASE("a gap in the data ends a segment and no number that is not finite is kept") {
  const double nan = std::nan(""), inf = std::numeric_limits<double>::infinity();
  const auto segments =
      segments_of(std::vector{1.0, 2.0, 3.0, 4.0, 5.0, 6.0}, std::vector{1.0, 2.0, nan, 4.0, inf, 6.0});
  REQUIRE(segments.size() == 3);
  CHECK(segments[0].x == std::vector{1.0, 2.0});
  CHECK(segments[1].y == std::vector{4.0});
  CHECK(segments[2].x == std::vector{6.0});
}

TEST_CASE("ticks are round numbers with no more decimals than they need") {
  CHECK(texts(ticks(axis(Scale::linear), {0.0, 1.0}, 5)) ==
        std::vector<std::string>{"0.0", "0.2", "0.4", "0.6", "0.8", "1.0"});
  CHECK(texts(ticks(axis(Scale::linear), {-3.0, 7.0}, 5)) == std::vector<std::string>{"−2", "0", "2", "4", "6"});
  CHECK(texts(ticks(axis(Scale::linear), {0.0, 4.1e6}, 4)) ==
        std::vector<std::string>{"0", "10⁶", "2×10⁶", "3×10⁶", "4×10⁶"});
  CHECK(texts(ticks(axis(Scale::linear), {-2e-5, 2e-5}, 4)) ==
        std::vector<std::string>{"−2×10⁻⁵", "−10⁻⁵", "0", "10⁻⁵", "2×10⁻⁵"});
  Axis degrees = axis(Scale::linear);
  degrees.tick_step = 90.0;
  CHECK(texts(ticks(degrees, {-180.0, 180.0}, 3)) == std::vector<std::string>{"−180", "−90", "0", "90", "180"});
}

TEST_CASE("ticks of a logarithmic axis are decades, with 2 and 5 where there is room") {
  CHECK(texts(ticks(axis(Scale::logarithmic), {1.0, 100.0}, 6)) ==
        std::vector<std::string>{"1", "2", "5", "10", "20", "50", "100"});
  CHECK(texts(ticks(axis(Scale::logarithmic), {1e-6, 1.0}, 6)) ==
        std::vector<std::string>{"10⁻⁶", "10⁻⁵", "10⁻⁴", "0.001", "0.01", "0.1", "1"});
  CHECK(ticks(axis(Scale::logarithmic), {1e-12, 1e6}, 6).size() <= 7);
  // Less than a decade: linear steps.
  CHECK(texts(ticks(axis(Scale::logarithmic), {21.0, 29.0}, 4)) == std::vector<std::string>{"22", "24", "26", "28"});
}

TEST_CASE("there are about as many ticks as wanted, within the range, for any range") {
  for (double width = 1e-9; width < 1e9; width *= 3.7) {
    const base::Interval range{-0.31 * width, 0.69 * width};
    const auto found = ticks(axis(Scale::linear), range, 6);
    CHECK(found.size() >= 3);
    CHECK(found.size() <= 11);
    for (const Tick& tick : found) CHECK((tick.at >= range.lo - 1e-6 * width && tick.at <= range.hi + 1e-6 * width));
  }
}

TEST_CASE("an axis of positive values starts at zero, one far from zero does not") {
  const auto near = y_range(one_series({0.0, 1.0}, {0.2, 1.0}), one_series({0.0, 1.0}, {0.2, 1.0}).panels[0]);
  CHECK(near.lo == 0.0);
  CHECK(near.hi > 1.0);
  const Chart far = one_series({0.0, 1.0}, {100.0, 101.0});
  CHECK(y_range(far, far.panels[0]).lo > 99.0);
}

TEST_CASE("a value near zero does not stretch a logarithmic axis over more than six decades") {
  const Chart chart = one_series({0.0, 1.0, 2.0}, {1e-30, 0.0, 10.0}, Scale::logarithmic);
  const base::Interval range = y_range(chart, chart.panels[0]);
  CHECK(range.lo == Approx(1e-5).epsilon(0.01));
  CHECK(range.hi > 10.0);
}

TEST_CASE("only what lies within the given range of x sets the range of y") {
  Chart chart = one_series({0.0, 1.0, 50.0}, {1.0, 2.0, 900.0});
  chart.x.range = {0.0, 10.0};
  CHECK(y_range(chart, chart.panels[0]).hi < 3.0);
}

TEST_CASE("a limit near the data is in the picture, one far away is not") {
  Chart chart = one_series({0.0, 1.0}, {0.5, 1.0});
  chart.panels[0].marks = {{Direction::horizontal, 2.8, "limit", MarkKind::limit}};
  CHECK(y_range(chart, chart.panels[0]).contains(2.8));
  chart.panels[0].marks[0].at = 280.0;
  CHECK(y_range(chart, chart.panels[0]).hi < 2.0);
}

TEST_CASE("ranges are never empty") {
  for (const Scale scale : {Scale::linear, Scale::logarithmic}) {
    for (const std::vector<double>& y : {std::vector<double>{}, {0.0}, {3.0}, {3.0, 3.0}, {-3.0}}) {
      const Chart chart = one_series(std::vector<double>(y.size(), 1.0), y, scale);
      CHECK(y_range(chart, chart.panels[0]).width() > 0.0);
      CHECK(x_range(chart).width() > 0.0);
    }
  }
}

TEST_CASE("a chart that cannot be drawn is refused with its name and the rule it breaks") {
  const auto fault = [](Chart chart) -> std::string {
    try {
      check(chart);
      return "none";
    } catch (const base::Error& error) {
      CHECK(error.kind == base::ErrorKind::internal);
      return error.what();
    }
  };
  const Chart good = tests::spectrum_chart();
  CHECK(fault(good) == "none");
  CHECK(fault(Chart{}).find("no panel") != std::string::npos);
  Chart bad = good;
  bad.panels[0].series[0].segments[0].y[7] = std::nan("");
  CHECK(fault(bad).find("not finite") != std::string::npos);
  CHECK(fault(bad).find("Spectrum") != std::string::npos);
  bad = good;
  bad.panels[0].series[0].segments[0].y.pop_back();
  CHECK(fault(bad).find("differ in length") != std::string::npos);
  bad = tests::waterfall_chart();
  bad.panels[0].heat_map->values.pop_back();
  CHECK(fault(bad).find("grid") != std::string::npos);
  bad = good;
  bad.x.scale = Scale::logarithmic;
  bad.x.range = {0.0, 10.0};
  CHECK(fault(bad).find("not positive") != std::string::npos);
}

TEST_CASE("a chart without a description gets one from its data") {
  const std::string words = description_of(tests::spectrum_chart());
  CHECK(words ==
        "Spectrum. Velocity (mm/s r.m.s.) against Frequency (Hz): pump-de-h and pump-de-v. "
        "Marked: natural frequency and target.");
  Chart own = tests::spectrum_chart();
  own.description = "Two peaks.";
  CHECK(description_of(own) == "Two peaks.");
}
