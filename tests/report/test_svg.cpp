#include <algorithm>
#include <cmath>
#include <map>

#include "stillmass/report/svg.hpp"

#include "report/markup_check.hpp"
#include "report/sample_charts.hpp"
#include "report/svg_heat.hpp"
#include "report/svg_labels.hpp"
#include "report/svg_writer.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;

namespace {

struct Reach {
  double from, to;
};

Reach reach(const Flag& flag) {
  const double width = text_width(flag.text, 11.0) + 3.0;
  return flag.to_left ? Reach{flag.at - width, flag.at} : Reach{flag.at, flag.at + width};
}

}  // namespace

TEST_CASE("the SVG of a chart is well-formed, has its words and no number that is not one") {
  for (const Chart& chart : {tests::spectrum_chart(), tests::waterfall_chart()}) {
    const std::string text = svg(chart);
    CHECK(tests::fault_of_markup(text) == "");
    CHECK(text.find("nan") == std::string::npos);
    CHECK(text.find("inf") == std::string::npos);
    CHECK(text.find(chart.title) != std::string::npos);
    CHECK(text.find("Frequency (Hz)") != std::string::npos);
  }
  const std::string text = svg(tests::spectrum_chart());
  for (const char* words : {"pump-de-h", "natural frequency", "target", "zone C", "5.0 at 123 Hz"}) {
    CHECK(text.find(words) != std::string::npos);
  }
}

TEST_CASE("a picture of 20 000 lines stays small") { CHECK(svg(tests::spectrum_chart()).size() < 150000); }

TEST_CASE("what people wrote cannot become markup") {
  Chart chart = tests::spectrum_chart();
  chart.title = "<script>alert(1)</script>";
  chart.panels[0].series[0].name = "a<b>&\"c'";
  chart.panels[0].marks[0].label = "</text>";
  const std::string text = svg(chart);
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(text.find("<script") == std::string::npos);
  CHECK(text.find("a&lt;b&gt;&amp;&quot;c&#39;") != std::string::npos);
}

TEST_CASE("two series differ without colour") {
  const std::string text = svg(tests::spectrum_chart());
  CHECK(text.find("stroke-dasharray=\"7 3\"") != std::string::npos);
}

TEST_CASE("a value at zero leaves a gap on a logarithmic axis and no trace of it") {
  Chart chart;
  chart.title = "gap";
  chart.panels.resize(1);
  chart.panels[0].y.scale = Scale::logarithmic;
  chart.panels[0].series = {series_of("", std::vector{0.0, 1.0, 2.0, 3.0, 4.0}, std::vector{1.0, 2.0, 0.0, 2.0, -1.0})};
  const std::string text = svg(chart);
  CHECK(text.find("nan") == std::string::npos);
  CHECK(tests::fault_of_markup(text) == "");
}

TEST_CASE("labels of marks never lie on each other, and no pole runs through one where that can be had") {
  // Forcing frequencies of a pump: crowded at both ends.
  std::vector<Flag> flags;
  for (const double at : {3.0, 40.0, 41.0, 60.0, 61.0, 90.0, 200.0, 205.0, 300.0, 560.0, 640.0, 660.0, 690.0}) {
    flags.push_back({at, "forcing frequency"});
  }
  const auto placed = placed_flags(flags, 700.0, 11.0);
  REQUIRE(placed.size() == flags.size());
  for (std::size_t i = 0; i < placed.size(); ++i) {
    for (std::size_t j = 0; j < placed.size(); ++j) {
      if (i == j) continue;
      const Reach a = reach(placed[i]), b = reach(placed[j]);
      CHECK_FALSE((placed[i].row == placed[j].row && a.from < b.to && b.from < a.to));
      const bool same_side = placed[i].to_left == placed[j].to_left;
      CHECK_FALSE((same_side && placed[i].row >= placed[j].row && b.from < placed[i].at && placed[i].at < b.to));
    }
  }
}

TEST_CASE("labels beside a panel keep their order and their distance") {
  const auto places = spread({50.0, 52.0, 51.0, 100.0, 199.0, 198.0}, 13.0, 0.0, 200.0);
  CHECK(places[0] < places[2]);
  CHECK(places[2] < places[1]);
  CHECK(places[5] < places[4]);
  auto sorted = places;
  std::sort(sorted.begin(), sorted.end());
  for (std::size_t i = 1; i < sorted.size(); ++i) CHECK(sorted[i] - sorted[i - 1] >= 13.0 - 1e-9);
  CHECK(sorted.back() <= 200.0);
  CHECK(places[3] == 100.0);
}

TEST_CASE("a callout finds a free place inside the frame") {
  const Box frame{0.0, 0.0, 300.0, 200.0};
  std::vector<Box> taken;
  for (int i = 0; i < 6; ++i) {
    const Box box = placed_beside(150.0, 100.0, 60.0, 14.0, frame, taken);
    for (const Box& other : taken) CHECK_FALSE(box.overlaps(other));
    CHECK((box.left >= 0.0 && box.right <= 300.0 && box.top >= 0.0 && box.bottom <= 200.0));
    taken.push_back(box);
  }
}

TEST_CASE("darkness of a heat map rises with the value") {
  const base::Interval range{1e-3, 10.0};
  CHECK(heat_level(1e-3, Scale::logarithmic, range) == 0);
  CHECK(heat_level(10.0, Scale::logarithmic, range) == heat_levels - 1);
  CHECK(heat_level(0.1, Scale::logarithmic, range) == 8);  // half way: 15 / 2, rounded
  CHECK(heat_level(0.0, Scale::logarithmic, range) == 0);
  CHECK(heat_level(99.0, Scale::linear, range) == heat_levels - 1);
}

TEST_CASE("lengths in a drawing are short") {
  CHECK(px(12.0) == "12");
  CHECK(px(12.34) == "12.3");
  CHECK(px(-0.01) == "0");
}
