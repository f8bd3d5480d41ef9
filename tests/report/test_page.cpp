#include "stillmass/report/page.hpp"

#include "report/asset.hpp"
#include "report/markup.hpp"
#include "report/markup_check.hpp"
#include "report/sample_charts.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;

namespace {

Page page_with(std::vector<Block> blocks) {
  Page page;
  page.title = "Pump";
  page.subtitle = "Vibration survey";
  page.facts = {{"Survey", "survey.toml"}};
  page.verdict = "An absorber of 8.4 kg.";
  page.lines = {{"Cause", "Resonance", Tone::bad}};
  page.sections = {{"First", std::move(blocks)}, {"Second", {}}};
  return page;
}

/// The document without what stands in script elements.
std::string without_scripts(std::string text) {
  for (auto at = text.find("<script"); at != std::string::npos; at = text.find("<script", at)) {
    text.erase(at, text.find("</script>", at) + 9 - at);
  }
  return text;
}

}  // namespace

TEST_CASE("the page is well-formed with every kind of block") {
  SpecSheet sheet;
  sheet.title = "Absorber";
  sheet.rows = {{"Mass", "8.4 kg", "±0.05 kg", ""}};
  sheet.drawing = BladeDrawing{};
  sheet.steps = {"Tap it."};
  const MachineSketch sketch{"Points", {{"a", {{0.0, 0.0, 0.0}}, "+y", "", false}, {"b", {}, "horizontal", "", true}}};
  const std::string text = html(page_with({Paragraph{"words"}, Bullets{{"one", "two"}, true},
                                           Table{"T", {"a", "b"}, {{"1"}, {"2", "x"}}, {"note"}},
                                           tests::spectrum_chart(), Caution{Tone::bad, "Clipped", "Again."}, sheet,
                                           sketch, Details{"more", {Paragraph{"inside"}, tests::waterfall_chart()}}}));
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(tests::count_of(text, "<figure class=\"chart\">") == 2);
  CHECK(tests::count_of(text, "type=\"application/json\"") == 2);
  CHECK(text.size() < 4000000);
}

TEST_CASE("the page points at nothing outside itself and forbids it, too") {
  const std::string text = without_scripts(html(page_with({tests::spectrum_chart()})));
  CHECK(tests::count_of(text, "http") ==
        tests::count_of(text, "http-equiv") + tests::count_of(text, "http://www.w3.org/2000/svg"));
  CHECK(text.find("url(") == std::string::npos);
  CHECK(text.find("@import") == std::string::npos);
  CHECK(text.find("default-src 'none'") != std::string::npos);
}

TEST_CASE("the chart library travels only with a page that has a chart, folded ones too") {
  const auto has_library = [](const Page& page) { return html(page).find("plotly.js") != std::string::npos; };
  REQUIRE_FALSE(asset("plotly.js").empty());
  CHECK(has_library(page_with({tests::spectrum_chart()})));
  CHECK(has_library(page_with({Details{"folded", {tests::spectrum_chart()}}})));
  CHECK_FALSE(has_library(page_with({Paragraph{"words"}})));
}

TEST_CASE("no text that people wrote becomes markup or script, wherever it stands") {
  const std::string evil = "</script><img src=x onerror=alert(1)>\"'&";
  Chart chart = tests::spectrum_chart();
  chart.title = chart.caption = chart.description = chart.x.label = evil;
  chart.panels[0].series[0].name = chart.panels[0].marks[0].label = chart.panels[0].callouts[0].text = evil;
  SpecSheet sheet;
  sheet.title = sheet.purpose = evil;
  sheet.rows = {{evil, evil, evil, evil}};
  sheet.steps = sheet.notes = {evil};
  sheet.drawing = BladeDrawing{};
  sheet.drawing->direction = sheet.drawing->material = sheet.drawing->damper = evil;
  Page page = page_with({Paragraph{evil}, Bullets{{evil}}, Table{evil, {evil}, {{evil}}, {evil}}, chart,
                         Caution{Tone::bad, evil, evil}, sheet, MachineSketch{evil, {{evil, {{0, 0, 0}}, evil, evil}}},
                         Details{evil, {Paragraph{evil}}}});
  page.title = page.subtitle = page.verdict = page.sections[0].heading = evil;
  page.facts = {{evil, evil}};
  page.lines = {{evil, evil}};
  const std::string text = html(page);
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(without_scripts(text).find("<img") == std::string::npos);
}

TEST_CASE("escaping replaces what HTML reads as markup, and bytes that are no text") {
  CHECK(escaped("a<b>&\"'") == "a&lt;b&gt;&amp;&quot;&#39;");
  CHECK(escaped("line\nbreak\ttab") == "line break tab");
  CHECK(escaped("bell\x07") == "bell?");
  CHECK(escaped("caf\xE9") == "café");
  CHECK(escaped("µm") == "µm");
}

TEST_CASE("columns of numbers are set to the right, others not") {
  for (const char* cell : {"24.6", "24.63 ± 0.01", "-3", "−3", "1.2e-5", "", "–"}) {
    INFO(cell);
    CHECK(is_numeric_cell(cell));
  }
  for (const char* cell : {"10 to 20", "1x", "duty.wav", "..."}) {
    INFO(cell);
    CHECK_FALSE(is_numeric_cell(cell));
  }
  const std::string text =
      html(page_with({Table{"", {"Frequency", "Cause"}, {{"24.6", "1x"}, {"49.2", "unbalance"}}, {}}}));
  CHECK(text.find("<td class=\"number\">24.6</td><td>1x</td>") != std::string::npos);
}

TEST_CASE("the policy names the hash of each script and nothing else") {
  // SHA-256 of no bytes in base64: RFC 4648 coding of the value in FIPS 180-4 examples (e3b0c442...b855).
  const std::string_view none;
  CHECK(content_policy(std::span(&none, 1)).find("script-src 'sha256-47DEQpj8HBSa+/TImW+5JCeuQeRkm5NMpJWZG3hSuFU=';") !=
        std::string::npos);
  CHECK(content_policy({}).find("script-src 'none'") != std::string::npos);
}

TEST_CASE("tone is told by a sign and a word, not by colour alone") {
  const std::string text = html(page_with({Caution{Tone::bad, "", "x"}, Caution{Tone::caution, "", "y"}}));
  CHECK(text.find(">Act: </span>") != std::string::npos);
  CHECK(text.find(">Caution: </span>") != std::string::npos);
}
