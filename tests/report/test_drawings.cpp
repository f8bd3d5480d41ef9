#include "stillmass/report/machine_sketch.hpp"
#include "stillmass/report/spec_sheet.hpp"

#include "report/markup_check.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::report;

TEST_CASE("a blade drawing shows the numbers it has and letters for those it has not") {
  BladeDrawing drawing;
  drawing.free_length_m = 0.245;
  drawing.thickness_m = 0.0082;
  drawing.tip_mass_kg = 8.4;
  const std::string text = svg(drawing);
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(text.find(">L = 245 mm<") != std::string::npos);
  CHECK(text.find(">t = 8.2 mm<") != std::string::npos);
  CHECK(text.find(">b<") != std::string::npos);
  CHECK(text.find(">8.4 kg<") != std::string::npos);
  CHECK(text.find("to tune") == std::string::npos);
}

TEST_CASE("a sheet without a drawing is a table and lists") {
  SpecSheet sheet;
  sheet.title = "Absorber";
  sheet.rows = {{"Mass", "8.4 kg", "", ""}};
  const std::string text = html(sheet);
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(text.find("<svg") == std::string::npos);
  CHECK(text.find("Tuning") == std::string::npos);
}

TEST_CASE("the sketch shows points with a position in the box and lists the others") {
  const MachineSketch sketch{"Points",
                             {{"left", {{0.0, 0.0, 0.0}}, "+x", "2.1 mm/s", false},
                              {"right", {{1.0, 0.0, 0.0}}, "-z", "", false},
                              {"nowhere", {}, "horizontal", "", false}}};
  const std::string text = svg(sketch);
  CHECK(tests::fault_of_markup(text) == "");
  CHECK(text.find("left: 2.1 mm/s") != std::string::npos);
  CHECK(text.find("nowhere, horizontal") != std::string::npos);
  CHECK(text.find("nan") == std::string::npos);
  CHECK(svg(MachineSketch{}).empty());
}

TEST_CASE("a sketch of one point and one of points without positions can be drawn") {
  for (const MachineSketch& sketch :
       {MachineSketch{"", {{"a", {{3.0, 2.0, 1.0}}, "", "", false}}}, MachineSketch{"", {{"a", {}, "", "", false}}}}) {
    CHECK(tests::fault_of_markup(svg(sketch)) == "");
    CHECK(svg(sketch).find("nan") == std::string::npos);
  }
}
