#include <cmath>

#include <nlohmann/json.hpp>

#include "stillmass/report/plotly.hpp"

#include "report/json_text.hpp"
#include "report/sample_charts.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;
using nlohmann::json;

TEST_CASE("JSON written by hand is JSON, whatever the text") {
  JsonText out;
  out.open('{').key("a<b").text("</script>\n\"\\ µ").key("latin").text("caf\xE9").key("n").open('[');
  out.number(1.0).number(std::nan("")).null().number(1.0 / 3.0).number(-1.5e-300).close(']');
  out.key("e").open('{').close('}').key("t").boolean(true).close('}');
  CHECK(out.str().find('<') == std::string::npos);
  const json read = json::parse(out.str());
  CHECK(read["a<b"] == "</script>\n\"\\ µ");
  CHECK(read["latin"] == "café");
  CHECK(read["n"][1].is_null());
  CHECK(read["n"][3].get<double>() == Approx(1.0 / 3.0).epsilon(1e-6));
  CHECK(read["e"].empty());
  CHECK(read["t"] == true);
}

TEST_CASE("a chart becomes traces, axes with units, shapes and a read-out with the unit") {
  const json chart = json::parse(plotly_json(tests::spectrum_chart()));
  REQUIRE(chart["data"].size() == 2);
  const json& trace = chart["data"][0];
  CHECK(trace["name"] == "pump-de-h");
  CHECK(trace["x"].size() == trace["y"].size());
  CHECK(trace["x"].size() <= 3201);
  CHECK(trace["hovertemplate"] == "%{y:.4~g} mm/s r.m.s.");
  const auto peak = std::max_element(trace["y"].begin(), trace["y"].end());
  CHECK(peak->get<double>() == 5.0);
  CHECK(trace["x"][static_cast<std::size_t>(peak - trace["y"].begin())].get<double>() == Approx(123.45));
  CHECK(chart["layout"]["xaxis"]["title"]["text"] == "Frequency (Hz)");
  CHECK(chart["layout"]["yaxis"]["title"]["text"] == "Velocity (mm/s r.m.s.)");
  CHECK(chart["layout"]["shapes"].size() == 3);
  CHECK(chart["meta"]["flags"][0]["text"] == "natural frequency");
}

TEST_CASE("the chart library is told to contact nobody and to show no sign of its maker") {
  const json config = json::parse(plotly_json(tests::spectrum_chart()))["config"];
  CHECK(config["displaylogo"] == false);
  CHECK(config["showSendToCloud"] == false);
  CHECK(config["plotlyServerURL"] == "");
}

TEST_CASE("a logarithmic axis gets its range as powers and its annotations, too") {
  Chart source = tests::spectrum_chart();
  source.x.scale = Scale::logarithmic;
  source.x.range = {1.0, 1000.0};
  const json chart = json::parse(plotly_json(source));
  CHECK(chart["layout"]["xaxis"]["type"] == "log");
  CHECK(chart["layout"]["xaxis"]["range"][1].get<double>() == Approx(3.0));
  bool found = false;
  for (const json& note : chart["layout"]["annotations"]) {
    if (note["text"] != "5.0 at 123 Hz") continue;
    found = true;
    CHECK(note["x"].get<double>() == Approx(std::log10(123.45)));
  }
  CHECK(found);
}

TEST_CASE("panels share x and a name has one colour and one line in the legend") {
  Chart source = tests::spectrum_chart();
  source.panels.push_back(source.panels[0]);
  const json chart = json::parse(plotly_json(source));
  REQUIRE(chart["data"].size() == 4);
  CHECK(chart["data"][0]["yaxis"] == "y");
  CHECK(chart["data"][2]["yaxis"] == "y2");
  CHECK(chart["data"][2]["xaxis"] == "x");
  CHECK(chart["data"][0]["line"]["color"] == chart["data"][2]["line"]["color"]);
  CHECK(chart["data"][0]["line"]["color"] != chart["data"][1]["line"]["color"]);
  CHECK(chart["data"][0]["showlegend"] == true);
  CHECK(chart["data"][2]["showlegend"] == false);
  CHECK(chart["layout"]["yaxis"]["domain"][0].get<double>() > chart["layout"]["yaxis2"]["domain"][1].get<double>());
}

TEST_CASE("a heat map is tiled to a bounded size and keeps values for the read-out") {
  const std::string text = plotly_json(tests::waterfall_chart());
  const json chart = json::parse(text);
  const json& trace = chart["data"][0];
  CHECK(trace["type"] == "heatmap");
  CHECK(trace["z"].size() == 100);     // 300 rows, 3 a tile
  CHECK(trace["z"][0].size() == 200);  // 400 columns, 2 a tile
  CHECK(trace["zmax"].get<double>() == Approx(std::log10(7.0)));
  CHECK(chart["meta"]["logMaps"][0] == 0);
  CHECK(trace["hovertemplate"].get<std::string>().find("%{customdata") != std::string::npos);
}

TEST_CASE("gaps are nulls, and names are neither HTML nor a template to the chart library") {
  Chart source;
  source.title = "gap";
  source.panels.resize(1);
  source.panels[0].y = {"Level", "% of <full> scale"};
  source.panels[0].series = {series_of("<b>&%{x}", std::vector{1.0, 2.0, 3.0}, std::vector{1.0, std::nan(""), 3.0}),
                             series_of("other", std::vector{1.0}, std::vector{1.0})};
  const std::string text = plotly_json(source);
  const json chart = json::parse(text);
  CHECK(text.find('<') == std::string::npos);
  CHECK(chart["data"][0]["y"] == json::parse("[1, null, 3]"));
  CHECK(chart["data"][0]["name"] == "&lt;b&gt;&amp;%{x}");
  CHECK(chart["data"][0]["hovertemplate"] == "%{y:.4~g} &#37; of &lt;full&gt; scale");
}
