#include "stillmass/base/error.hpp"

#include "simulate/skids.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

// The error's text for a file with `wrong` in place of `right`, or with `wrong` added where `right` is empty.
std::string refusal(const std::string& right, const std::string& wrong) {
  std::string text = tests::one_body(tests::recording("steady", 500, 1));
  if (right.empty()) {
    text += wrong;
  } else {
    text.replace(text.find(right), right.size(), wrong);
  }
  try {
    tests::parsed(text);
  } catch (const base::Error& error) {
    CHECK(error.kind == base::ErrorKind::usage);
    CHECK(error.line.value_or(0) > 1);
    return error.what();
  }
  return "accepted";
}

bool says(const std::string& text, const std::string& part) { return text.find(part) != std::string::npos; }

}  // namespace

TEST_CASE("a skid file's units become SI") {
  const auto file = tests::parsed(tests::one_body(R"(
[hammer]
point = "centre"
peak_n = 900
tip_ms = 6
interval_s = 7
blows = 3
[[force]]
kind = "unbalance"
body = "block"
at_m = [0, 0, 0]
unbalance_g_mm = 1200
phase_deg = 180
)" + tests::recording("bump", 2048, 20)));
  CHECK(file.drive.speed_hz == Approx(18.0));
  CHECK(file.hammer->tip_s == Approx(0.006));
  CHECK(file.forces[0].unbalance_kg_m == Approx(1.2e-3));
  CHECK(file.forces[0].phase_rad == Approx(3.14159265358979));
  CHECK(file.sensors[0].sensitivity_v == Approx(1.0));
  CHECK(file.points[0].direction == simulate::Vector3{0.0, 1.0, 0.0});
  CHECK(file.recordings[0].kind == simulate::RecordingKind::bump);
}

TEST_CASE("a wrong name is refused with the names that are known") {
  CHECK(says(refusal("body = \"block\"\nat_m = [0.5, 0.5, 0.5]", "body = \"blok\"\nat_m = [0.5, 0.5, 0.5]"),
             "known here: block"));
  CHECK(says(refusal("point = \"centre\"\nsensor", "point = \"middle\"\nsensor"), "known here: centre"));
  CHECK(says(refusal("sensor = \"ideal\"", "sensor = \"pulse\""), "not one of vibration"));
}

TEST_CASE("what cannot be made is refused where it stands") {
  CHECK(says(refusal("[0, 0, 0]\ninertia", "[0, 0]\ninertia"), "three numbers"));
  CHECK(says(refusal("a.wav", "../a.wav"), "without a folder"));
  CHECK(says(refusal("a.wav", "a.mp3"), ".wav or .csv"));
  CHECK(says(refusal("bits = 24", "bits = 12"), "16 or 24"));
  CHECK(says(refusal("kind = \"steady\"", "kind = \"bump\""), "no [hammer]"));
  CHECK(says(refusal("bits = 24", "fitted = true"), "no [absorber]"));
  CHECK(says(refusal("", tests::recording("steady", 500, 1)), "made twice"));
  CHECK(says(refusal("", "[[body]]\nname = \"block\"\nmass_kg = 1\ncentre_m = [0,0,0]\ninertia_kg_m2 = [1,1,1]\n"),
             "twice"));
}
