#include <algorithm>
#include <cmath>

#include "stillmass/report/reduce.hpp"

#include "report/sample_charts.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;

namespace {

bool holds(const Segment& curve, double x, double y) {
  for (std::size_t i = 0; i < curve.x.size(); ++i) {
    if (curve.x[i] == x && curve.y[i] == y) return true;
  }
  return false;
}

Segment rough_curve(std::size_t points) {
  Segment curve;
  for (std::size_t i = 0; i < points; ++i) {
    const double x = 0.001 * static_cast<double>(i + 1);
    curve.x.push_back(x);
    curve.y.push_back(std::sin(37.0 * x) + 0.3 * std::sin(9001.0 * x));
  }
  return curve;
}

}  // namespace

TEST_CASE("a peak one point wide is not lost and not moved") {
  const Segment curve = tests::spectrum_chart().panels[0].series[0].segments[0];
  const Segment small = reduced(curve, Scale::linear, 300);
  CHECK(small.x.size() <= 1200);
  CHECK(holds(small, curve.x[2469], 5.0));
}

TEST_CASE("every column keeps its lowest and its highest point, at most four in all") {
  const std::size_t columns = 250;
  for (const Scale scale : {Scale::linear, Scale::logarithmic}) {
    const Segment curve = rough_curve(50000);
    const Segment small = reduced(curve, scale, columns);
    CHECK(small.x.size() <= 4 * columns);
    CHECK(std::is_sorted(small.x.begin(), small.x.end()));
    CHECK(small.x.front() == curve.x.front());
    CHECK(small.x.back() == curve.x.back());
    CHECK(*std::max_element(small.y.begin(), small.y.end()) == *std::max_element(curve.y.begin(), curve.y.end()));
    CHECK(*std::min_element(small.y.begin(), small.y.end()) == *std::min_element(curve.y.begin(), curve.y.end()));
    for (std::size_t i = 0; i < small.x.size(); i += 17) CHECK(holds(curve, small.x[i], small.y[i]));
  }
}

TEST_CASE("on a logarithmic axis low frequencies keep their points") {
  const Segment small = reduced(rough_curve(50000), Scale::logarithmic, 250);  // 0.001 to 50: 4.7 decades
  const auto below = std::count_if(small.x.begin(), small.x.end(), [](double x) { return x < 0.05; });
  CHECK(below == 49);
}

TEST_CASE("points that an axis has no place for are dropped, the rest is as it was") {
  Segment curve{{0.0, 1.0, 2.0}, {5.0, 6.0, 7.0}};
  const Segment small = reduced(curve, Scale::logarithmic, 100);
  CHECK(small.x == std::vector{1.0, 2.0});
  CHECK(small.y == std::vector{6.0, 7.0});
}

TEST_CASE("short curves and curves that turn back stay as they are") {
  const Segment curve = rough_curve(100);
  CHECK(reduced(curve, Scale::linear, 100).y == curve.y);
  Segment circle;
  for (int i = 0; i < 5000; ++i) {
    circle.x.push_back(std::cos(0.01 * i));
    circle.y.push_back(std::sin(0.01 * i));
  }
  CHECK(reduced(circle, Scale::linear, 10).x == circle.x);
}

TEST_CASE("the points at marks and callouts survive") {
  const Segment curve = rough_curve(50000);
  const double wanted = curve.x[31234];
  CHECK(holds(reduced(curve, Scale::linear, 50, std::vector{wanted}), wanted, curve.y[31234]));
}

TEST_CASE("a reduced band covers the whole band") {
  Band band;
  for (int i = 0; i < 10000; ++i) {
    band.x.push_back(i);
    band.low.push_back(-1.0 - 0.5 * std::sin(i));
    band.high.push_back(1.0 + 0.5 * std::sin(3.0 * i));
  }
  const Band small = reduced(band, Scale::linear, 100);
  CHECK(small.x.size() <= 200);
  for (std::size_t i = 0; i < band.x.size(); ++i) {
    const auto after = std::lower_bound(small.x.begin(), small.x.end(), band.x[i]);
    const auto column = static_cast<std::size_t>(after - small.x.begin());
    REQUIRE(column < small.x.size());
    CHECK((small.low[column] <= band.low[i] && small.high[column] >= band.high[i]));
  }
}

TEST_CASE("a heat map keeps its highest cell where it was, within a tile") {
  const HeatMap map = *tests::waterfall_chart().panels[0].heat_map;
  const HeatMap small = reduced(map, 100, 50);
  REQUIRE(small.values.size() == small.x.size() * small.y.size());
  CHECK(small.x.size() == 100);
  CHECK(small.y.size() == 50);
  const auto at =
      static_cast<std::size_t>(std::max_element(small.values.begin(), small.values.end()) - small.values.begin());
  CHECK(small.values[at] == 7.0);
  CHECK(std::abs(small.x[at % 100] - map.x[200]) <= 1.0);   // half of 4 cells of 0.5 Hz
  CHECK(std::abs(small.y[at / 100] - map.y[150]) <= 12.0);  // half of 6 rows of 4 rpm
  CHECK(std::count(small.values.begin(), small.values.end(), 0.001) == 4999);
}
