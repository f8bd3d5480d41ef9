// Calibration recordings written to files with a known truth, read back through a survey file as a user's would be.
#include <cmath>
#include <numbers>
#include <random>

#include "stillmass/base/error.hpp"
#include "stillmass/recording/writer.hpp"
#include "stillmass/survey/survey.hpp"

#include "support/catch.hpp"
#include "support/temporary_folder.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

constexpr double rate = 3200.0;
constexpr double pi = std::numbers::pi;

std::vector<double> tone(double peak, double frequency_hz, double seconds = 20.0) {
  std::mt19937 engine(5);
  std::vector<double> x(static_cast<std::size_t>(seconds * rate));
  for (std::size_t i = 0; i < x.size(); ++i) {
    const double noise = 1e-4 * (static_cast<double>(engine() % 2001) / 1000.0 - 1.0);
    x[i] = peak * std::sin(2.0 * pi * frequency_hz * static_cast<double>(i) / rate) + noise;
  }
  return x;
}

/// A visit with one accelerometer. Its true sensitivity is `truth` times the stated one; full scale is stated as 50
/// m/s2.
class Visit {
 public:
  explicit Visit(double truth) : truth_(truth) {
    // 5 mm/s at 50 Hz: an acceleration of 1.5708 m/s2 r.m.s.
    const double rms = 2.0 * pi * 50.0 * 0.005;
    recording::write_wav(folder_ / "duty.wav", {rate, {"a"}, {stored(tone(rms * std::sqrt(2.0), 50.0))}}, 24);
  }

  void add_calibrator(double rms = 10.0, double frequency_hz = 159.155) {
    const std::string file = "cal" + std::to_string(++calibrators_) + ".wav";
    recording::write_wav(folder_ / file, {rate, {"a"}, {stored(tone(rms * std::sqrt(2.0), frequency_hz))}}, 24);
    recordings_ += entry(file, "calibration", calibrator);
  }

  std::string entry(const std::string& file, const std::string& kind, const std::string& more) const {
    return "[[recording]]\nfile = \"" + file + "\"\nkind = \"" + kind + "\"\n" + more +
           "[[recording.channel]]\nindex = 1\npoint = \"p\"\n" + channel + "\n";
  }

  survey::SurveyResult run() {
    write_file(folder_ / "survey.toml", "[machine]\nname = \"m\"\n[[point]]\nname = \"p\"\n" + recordings_ +
                                            entry("duty.wav", "steady", "speed_rpm = 3000\n"));
    return survey::run(survey::read_survey(folder_ / "survey.toml"), {});
  }

  std::string channel = "unit = \"m/s2\"\nscale = 50";
  std::string calibrator;

 private:
  std::vector<double> stored(std::vector<double> x) const {
    for (double& v : x) v *= truth_ / 50.0;
    return x;
  }

  TemporaryFolder folder_;
  double truth_;
  int calibrators_ = 0;
  std::string recordings_;
};

const base::Estimate& velocity(const survey::SurveyResult& result) {
  return *result.spectra.front().result.channels.front().severity_velocity;
}

bool has(const std::vector<base::Finding>& findings, base::Code code) {
  return std::any_of(findings.begin(), findings.end(), [&](const auto& each) { return each.code == code; });
}

}  // namespace

TEST_CASE("a calibrator recording corrects the survey's other recordings and brings its uncertainty") {
  Visit visit(0.95);  // the sensor reads 5 % low
  CHECK(velocity(visit.run()).value == Approx(0.95 * 0.005).epsilon(3e-3));
  visit.add_calibrator();
  const auto result = visit.run();
  REQUIRE(result.calibrations.channels.size() == 1);
  CHECK(result.calibrations.channels[0].applied);
  CHECK(result.calibrations.channels[0].result.correction.value == Approx(1.0 / 0.95).epsilon(1e-3));
  CHECK(velocity(result).value == Approx(0.005).epsilon(3e-3));
  CHECK(*velocity(result).relative() >= 0.0149);  // 3 % at k = 2, of the calibrator
  CHECK(*velocity(result).relative() < 0.02);
  CHECK(result.refusals.empty());
}

TEST_CASE("a factor of 9.81 between stated and measured level is said, and the user decides") {
  Visit visit(1.0 / base::standard_gravity);
  visit.add_calibrator();
  const auto result = visit.run();
  CHECK_FALSE(result.calibrations.channels[0].applied);
  CHECK(has(result.findings, base::Code::calibration_off));
  CHECK(result.calibrations.channels[0].text.find("9.81 times too little") != std::string::npos);
  CHECK(velocity(result).value == Approx(0.005 / base::standard_gravity).epsilon(3e-3));  // as stated
  CHECK(*velocity(result).relative() > 8.0);  // and so uncertain that the truth lies within
}

TEST_CASE("a recorder whose scale nobody knows gets it from the calibrator") {
  for (const char* channel : {"unit = \"V\"", "unit = \"m/s2\""}) {
    Visit visit(0.4);
    visit.channel = channel;
    visit.add_calibrator();
    const auto result = visit.run();
    INFO(channel);
    REQUIRE(result.calibrations.channels.size() == 1);
    CHECK(result.calibrations.channels[0].applied);
    CHECK(velocity(result).value == Approx(0.005).epsilon(3e-3));
  }
}

TEST_CASE(
    "calibrations before and after the visit give their mean, not their product, and one of nobody corrects nothing") {
  Visit visit(0.95);
  visit.add_calibrator();
  visit.add_calibrator();
  const auto twice = visit.run();
  CHECK(velocity(twice).value == Approx(0.005).epsilon(3e-3));
  CHECK(*velocity(twice).relative() < 0.02);
  CHECK_FALSE(has(twice.findings, base::Code::calibration_off));

  Visit other(0.95);
  other.channel = "unit = \"m/s2\"\nscale = 50\nsensor = \"red\"";
  other.add_calibrator();
  other.channel = "unit = \"m/s2\"\nscale = 50";
  const auto unused = other.run();
  CHECK_FALSE(unused.calibrations.channels[0].applied);
  CHECK(has(unused.findings, base::Code::calibration_off));
}

TEST_CASE("a calibrator whose level is stated as velocity calibrates an accelerometer") {
  // 10 m/s2 at 1000 rad/s are 10 mm/s (CHECKS C1).
  Visit visit(0.95);
  visit.calibrator = "calibrator = { level = 10, unit = \"mm/s\", frequency_hz = 159.155 }\n";
  visit.add_calibrator();
  const auto result = visit.run();
  REQUIRE(result.calibrations.channels.size() == 1);
  CHECK(result.calibrations.channels[0].result.correction.value == Approx(1.0 / 0.95).epsilon(1e-3));
}

TEST_CASE("a calibrator that the recorder has cut off calibrates nothing") {
  Visit visit(1.0);
  visit.add_calibrator(40.0);  // a peak of 57 m/s2 in a range of 50
  const auto result = visit.run();
  CHECK(result.calibrations.channels.empty());
  REQUIRE_FALSE(result.refusals.empty());
  CHECK(result.refusals[0].seen.find("cut off") != std::string::npos);
}

TEST_CASE("a dead sensor on the calibrator is refused with what to do, and nothing is corrected") {
  Visit visit(1.0);
  visit.add_calibrator(0.0);
  const auto result = visit.run();
  CHECK(result.calibrations.channels.empty());
  REQUIRE(result.refusals.size() >= 1);
  CHECK(result.refusals[0].code == "no-calibrator-tone");
  CHECK(result.refusals[0].seen.find("cal1.wav") != std::string::npos);
  CHECK(velocity(result).value == Approx(0.005).epsilon(3e-3));
}

TEST_CASE("a calibration follows its sensor, not another one on the same input, and not another scale") {
  Visit visit(0.95);
  visit.channel = "unit = \"m/s2\"\nscale = 50\nsensor = \"red\"";
  visit.add_calibrator();
  visit.channel = "unit = \"m/s2\"\nscale = 50\nsensor = \"blue\"";
  CHECK(velocity(visit.run()).value == Approx(0.95 * 0.005).epsilon(3e-3));
  visit.channel = "unit = \"m/s2\"\nscale = 25\nsensor = \"red\"";
  const auto other_scale = visit.run();
  CHECK(has(other_scale.findings, base::Code::calibration_off));
  CHECK(velocity(other_scale).value == Approx(0.5 * 0.95 * 0.005).epsilon(3e-3));
  visit.channel = "unit = \"m/s2\"\nscale = 50\nsensor = \"red\"";
  CHECK(velocity(visit.run()).value == Approx(0.005).epsilon(3e-3));
}

namespace {

/// A hammer test on one mode of 40 Hz, damping ratio 1 %, modal mass 150 kg; and blows on a hung mass of 12 kg. The
/// hammer reads `hammer` times its truth, the sensor `sensor` times. Samples of an impulse-invariant mode.
class HammerVisit {
 public:
  HammerVisit(double hammer, double sensor) {
    const double w = 2.0 * pi * 40.0;
    const double zeta = 0.01;
    const double dt = 1.0 / rate;
    const auto count = static_cast<std::size_t>(40.0 * rate);
    std::vector<double> force(count, 0.0);
    for (int blow = 0; blow < 5; ++blow) {
      const auto first = static_cast<std::size_t>((1.0 + 7.5 * blow) * rate);
      for (std::size_t i = 0; i < 13; ++i) {
        force[first + i] = (400.0 + 30.0 * blow) * std::sin(pi * (static_cast<double>(i) + 0.5) / 13.0);
      }
    }
    // Equation of motion by the average-acceleration rule (Newmark 1959), in 20 steps a sample: 40 Hz to 1e-5.
    const int steps = 20;
    const double h = dt / steps;
    double x = 0.0;
    double v = 0.0;
    double a = 0.0;
    std::vector<double> mode(count);
    for (std::size_t i = 0; i < count; ++i) {
      for (int s = 0; s < steps; ++s) {
        const double next = i + 1 < count ? force[i + 1] : 0.0;
        const double f = force[i] + (next - force[i]) * (s + 1.0) / steps;
        const double xp = x + h * v + 0.25 * h * h * a;
        const double vp = v + 0.5 * h * a;
        const double b = (f / 150.0 - 2.0 * zeta * w * vp - w * w * xp) / (1.0 + zeta * w * h + 0.25 * w * w * h * h);
        x = xp + 0.25 * h * h * b;
        v = vp + 0.5 * h * b;
        a = b;
      }
      if (i + 1 < count) mode[i + 1] = a;
    }
    std::mt19937 engine(9);
    const auto noise = [&] { return static_cast<double>(engine() % 2001) / 1000.0 - 1.0; };
    std::vector<double> f(count);
    std::vector<double> on_machine(count);
    std::vector<double> on_mass(count);
    for (std::size_t i = 0; i < count; ++i) {
      f[i] = hammer * force[i] / 1000.0 + 1e-6 * noise();
      on_machine[i] = sensor * mode[i] / 100.0 + 1e-6 * noise();
      on_mass[i] = sensor * force[i] / 12.0 / 100.0 + 1e-6 * noise();
    }
    recording::write_wav_float(folder_ / "bump.wav", {rate, {"f", "a"}, {f, on_machine}});
    recording::write_wav_float(folder_ / "hung.wav", {rate, {"f", "a"}, {f, on_mass}});
  }

  survey::SurveyResult run(bool with_mass) {
    const std::string channels =
        "[[recording.channel]]\nindex = 1\npoint = \"p\"\nrole = \"force\"\nunit = \"N\"\nscale = 1000\n"
        "[[recording.channel]]\nindex = 2\npoint = \"p\"\nunit = \"m/s2\"\nscale = 100\n";
    std::string text = "[machine]\nname = \"m\"\n[[point]]\nname = \"p\"\n";
    if (with_mass) {
      text +=
          "[[recording]]\nfile = \"hung.wav\"\nkind = \"ratio-calibration\"\nknown_mass = { kg = 12.0 }\n" + channels;
    }
    text += "[[recording]]\nfile = \"bump.wav\"\nkind = \"bump\"\n" + channels;
    write_file(folder_ / "survey.toml", text);
    return survey::run(survey::read_survey(folder_ / "survey.toml"), {});
  }

 private:
  TemporaryFolder folder_;
};

}  // namespace

TEST_CASE("blows on a hung mass set hammer and sensor right together, and the modal mass with them") {
  HammerVisit visit(1.05, 0.97);
  const auto before = visit.run(false);
  REQUIRE(before.modes.size() == 1);
  CHECK(before.modes[0].modal_mass->value == Approx(150.0 * 1.05 / 0.97).epsilon(0.01));
  CHECK(*before.modes[0].modal_mass->relative() > 0.028);  // 2 % each, assumed

  const auto after = visit.run(true);
  REQUIRE(after.calibrations.channels.size() == 1);
  CHECK(after.calibrations.channels[0].applied);
  CHECK(after.calibrations.channels[0].channel == "p-force");
  REQUIRE(after.modes.size() == 1);
  CHECK(after.modes[0].modal_mass->value == Approx(150.0).epsilon(0.01));
  CHECK(*after.modes[0].modal_mass->relative() < 0.015);
  CHECK(std::abs(after.modes[0].modal_mass->value - 150.0) < 3.0 * *after.modes[0].modal_mass->u);
  for (const auto& bump : after.bumps) CHECK_FALSE(has(bump.findings, base::Code::calibration_assumed));
}

TEST_CASE("a ratio calibration without its mass, and a mass without one, are refused with the line") {
  TemporaryFolder folder;
  write_file(folder / "a.wav", "x");
  for (const char* wrong : {"kind = \"ratio-calibration\"\n", "kind = \"steady\"\nknown_mass = { kg = 3.0 }\n"}) {
    write_file(folder / "survey.toml",
               "[machine]\nname = \"m\"\n[[point]]\nname = \"p\"\n[[recording]]\nfile = "
               "\"a.wav\"\n" +
                   std::string(wrong));
    try {
      survey::read_survey(folder / "survey.toml");
      FAIL("it was taken");
    } catch (const base::Error& error) {
      CHECK(error.kind == base::ErrorKind::usage);
      CHECK(std::string(error.what()).find("known_mass") != std::string::npos);
    }
  }
}
