// What a survey file says of shafts, belts, gears, bearings and limits.
#include "stillmass/base/error.hpp"
#include "stillmass/survey/survey_file.hpp"

#include "support/catch.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

survey::Survey read(const std::string& more) {
  const TemporaryFolder folder;
  write_file(folder / "survey.toml", "[machine]\nname = \"m\"\n" + more + "[[point]]\nname = \"p\"\n");
  return survey::read_survey(folder / "survey.toml");
}

std::string refused(const std::string& more) {
  try {
    read(more);
  } catch (const base::Error& error) {
    return error.what();
  }
  return "";
}

bool says(const std::string& text, const char* word) { return text.find(word) != std::string::npos; }

}  // namespace

TEST_CASE("a belt gives its shaft the ratio of the sheaves, with the slip as its uncertainty") {
  const auto survey =
      read("[[machine.shaft]]\nname = \"fan\"\ndriver_sheave_mm = 200\nsheave_mm = 125\ncentre_mm = 500\nvanes = 9\n");
  const machine::Shaft& fan = survey.machine.shafts.at(0);
  CHECK(fan.ratio == Approx(1.6));
  CHECK(fan.ratio_u == Approx(0.01));
  CHECK(*fan.vanes == 9);
  // 2 C + pi/2 (D + d) + (D - d)^2 / 4 C = 1000 + 510.509 + 2.8125 mm
  CHECK(*fan.belt->length_m == Approx(1.513321).epsilon(1e-5));
}

TEST_CASE("a gear behind a gear has the product of the ratios") {
  const auto survey = read(
      "[[machine.shaft]]\nname = \"middle\"\ndriver_teeth = 20\nteeth = 40\n"
      "[[machine.shaft]]\nname = \"slow\"\ndriven_by = \"middle\"\ndriver_teeth = 18\nteeth = 54\n");
  CHECK(survey.machine.shafts.at(0).ratio == Approx(0.5));
  CHECK(survey.machine.shafts.at(1).ratio == Approx(1.0 / 6.0));
  CHECK(survey.machine.shafts.at(1).ratio_u == 0.0);
}

TEST_CASE("a shaft without any ratio, or with half of one, is refused") {
  CHECK(says(refused("[[machine.shaft]]\nname = \"x\"\n"), "needs 'ratio'"));
  CHECK(says(refused("[[machine.shaft]]\nname = \"x\"\nsheave_mm = 100\n"), "go together"));
  CHECK(says(refused("[[machine.shaft]]\nname = \"x\"\ndriver_teeth = 20\n"), "go together"));
  CHECK(says(refused("[[machine.shaft]]\nname = \"x\"\nratio = 2\ndriven_by = \"y\"\n"),
             "no [[machine.shaft]] named 'y'"));
  CHECK(says(refused("[[machine.shaft]]\nname = \"x\"\nsheave_mm = 100\ndriver_sheave_mm = 100\ncentre_mm = 90\n"),
             "touch"));
}

TEST_CASE("a bearing of the table needs its name alone") {
  const auto survey = read("[[machine.bearing]]\nname = \"6205\"\n");
  CHECK(survey.machine.bearings.at(0).elements == 9);
  CHECK(survey.machine.bearings.at(0).pitch_diameter_m == Approx(0.03904));
  const std::string unknown = refused("[[machine.bearing]]\nname = \"6025\"\n");
  CHECK(says(unknown, "'6025' is not in the program's table"));
  CHECK(says(unknown, "did you mean '6205'?"));
  CHECK(says(refused("[[machine.bearing]]\nname = \"6205\"\nball_mm = 8\n"), "go together"));
  const auto own =
      read("[[machine.bearing]]\nname = \"6205\"\nrolling_elements = 9\nball_mm = 7.938\npitch_mm = 38.5\n");
  CHECK(own.machine.bearings.at(0).pitch_diameter_m == Approx(0.0385));  // what the file says goes first
}

TEST_CASE("the plant's limits are read and must ascend, and the shaft height reaches the machine") {
  const auto survey = read(
      "kind = \"motor\"\n[[limit]]\nstandard = \"ISO 10816-3\"\nshaft_height_mm = 355\ntarget_mm_s = 2.8\nalarm_mm_s = "
      "4.5\ntrip_mm_s = 7.1\n");
  CHECK(*survey.limits.at(0).alarm_m_s == Approx(4.5e-3));
  CHECK(*survey.limits.at(0).trip_m_s == Approx(7.1e-3));
  CHECK(*survey.machine.shaft_height_m == Approx(0.355));
  CHECK(says(refused("[[limit]]\ntarget_mm_s = 2.8\nalarm_mm_s = 2\n"), "must not be below 'target_mm_s'"));
  CHECK(says(refused("[[limit]]\nalarm_mm_s = 8\ntrip_mm_s = 7\n"), "must not be below 'alarm_mm_s'"));
  CHECK(says(refused("[[limit]]\ncategory = \"I\"\n"), "needs 'standard'"));
}

TEST_CASE("rotor bars and the drive's switching frequency reach the machine") {
  const auto survey = read("supply = \"drive\"\nrotor_bars = 40\ndrive_switching_hz = 4000\n");
  CHECK(*survey.machine.rotor_bars == 40);
  CHECK(*survey.machine.drive_switching_hz == 4000.0);
}
