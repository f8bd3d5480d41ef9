// The survey of the demo recordings against the exact values of the virtual skid that made them. The skid is an
// independent model (equations of motion of two bodies on springs, solved in the frequency domain); the survey sees
// nothing of it but files.
#include <algorithm>
#include <cmath>

#include "truth/demo_truth.hpp"

using namespace stillmass;
using tests::point_of;
using tests::result;
using tests::skid;
using tests::truth;

namespace {

const simulate::ModeTruth& nearest(const std::vector<simulate::ModeTruth>& modes, double frequency_hz) {
  return *std::min_element(modes.begin(), modes.end(), [&](const auto& a, const auto& b) {
    return std::abs(a.frequency_hz - frequency_hz) < std::abs(b.frequency_hz - frequency_hz);
  });
}

// Within 25 % of itself or 3 % of the vibration before, whichever is larger.
void check_remaining(double predicted, double exact, double before) {
  CAPTURE(predicted, exact, before);
  CHECK(std::abs(predicted - exact) <= std::max(0.25 * exact, 0.03 * before));
}

}  // namespace

TEST_CASE("the rocking mode near running speed is found: frequency, damping, modal mass") {
  REQUIRE_FALSE(result().absorbers.empty());
  const modal::Mode& mode = result().modes[result().absorbers.front().mode];
  const simulate::ModeTruth& exact = nearest(truth().stopped, mode.frequency.value);
  const double mass = exact.modal_mass_kg(point_of(mode.point));
  CAPTURE(mode.frequency.value, exact.frequency_hz, mode.damping_ratio.value, exact.damping_ratio, mass);
  CHECK(mode.frequency.value == Approx(exact.frequency_hz).epsilon(0.005));
  CHECK(mode.damping_ratio.value == Approx(exact.damping_ratio).epsilon(0.15));
  REQUIRE(mode.modal_mass);
  CHECK(mode.modal_mass->value == Approx(mass).epsilon(0.10));
  // The half-power bandwidth, as a method of its own, holds the same limits.
  const auto half_power = std::find_if(mode.methods.begin(), mode.methods.end(), [](const modal::MethodResult& each) {
    return each.name.find("half-power") != std::string::npos;
  });
  REQUIRE(half_power != mode.methods.end());
  CHECK(half_power->frequency.value == Approx(exact.frequency_hz).epsilon(0.005));
  CHECK(half_power->damping_ratio.value == Approx(exact.damping_ratio).epsilon(0.15));
}

TEST_CASE("the calibrations find what the data sheets of the virtual sensors do not know") {
  const auto error_of = [](const std::string& sensor) {
    const auto& sensors = skid().sensors;
    const auto at = std::find_if(sensors.begin(), sensors.end(), [&](const auto& each) { return each.name == sensor; });
    REQUIRE(at != sensors.end());
    return at->sensitivity_error;
  };
  const auto& calibrations = result().calibrations.channels;
  REQUIRE(calibrations.size() == 2);
  CHECK(calibrations[0].sensor == "A1");
  CHECK(calibrations[0].applied);
  CHECK(calibrations[0].result.correction.value == Approx(1.0 / (1.0 + error_of("A1"))).epsilon(5e-4));
  CHECK(*calibrations[0].result.correction.relative() == Approx(0.015).epsilon(0.02));
  // On the hung mass the sensor is right by then: what is left is the hammer.
  CHECK(calibrations[1].sensor == "hammer");
  CHECK(calibrations[1].applied);
  CHECK(calibrations[1].result.correction.value == Approx(1.0 + error_of("hammer")).epsilon(1e-3));
  // So the modal mass is better than any data sheet: 0.3 % instead of 3 %.
  const modal::Mode& mode = result().modes[result().absorbers.front().mode];
  const double exact = nearest(truth().stopped, mode.frequency.value).modal_mass_kg(point_of(mode.point));
  REQUIRE(mode.modal_mass);
  CHECK(mode.modal_mass->value == Approx(exact).epsilon(0.003));
  CHECK(std::abs(mode.modal_mass->value - exact) < 3.0 * *mode.modal_mass->u);
}

TEST_CASE("every mode found is a mode of the skid") {
  REQUIRE(result().modes.size() >= 4);
  for (const modal::Mode& mode : result().modes) {
    const simulate::ModeTruth& exact = nearest(truth().stopped, mode.frequency.value);
    CAPTURE(mode.frequency.value, exact.frequency_hz);
    CHECK(mode.frequency.value == Approx(exact.frequency_hz).epsilon(0.01));
  }
}

TEST_CASE("the double hit and the overloaded hit are not used") {
  REQUIRE(result().bumps.size() == 1);
  std::size_t doubles = 0;
  std::size_t overloads = 0;
  std::size_t used = 0;
  for (const step::FileHit& each : result().bumps.front().hits) {
    doubles += each.hit.verdict == modal::HitVerdict::double_hit ? 1 : 0;
    overloads += each.hit.verdict == modal::HitVerdict::overload ? 1 : 0;
    used += each.hit.used ? 1 : 0;
  }
  CHECK(doubles == 1);
  CHECK(overloads == 1);
  CHECK(used >= 4);
}

TEST_CASE("levels and the running line before are those of the skid") {
  for (const auto& [index, spectra] : result().spectra) {
    const survey::SurveyRecording& recording = result().survey.recordings[index];
    if (recording.stage != survey::Stage::before || spectra.recording.rate_hz < 2000.0) continue;
    REQUIRE(spectra.speed);
    CHECK(spectra.speed->value == Approx(skid().drive.speed_hz).epsilon(0.001));
    for (const step::ChannelSpectrum& channel : spectra.channels) {
      const std::size_t point = point_of(channel.channel.point);
      CAPTURE(channel.channel.name);
      REQUIRE(channel.severity_velocity);
      // 5 %: sensitivity of the virtual sensors within 2 %, wander of the speed near a resonance.
      CHECK(channel.severity_velocity->value == Approx(truth().before.overall_rms[point]).epsilon(0.05));
    }
  }
}

TEST_CASE("the strongest lines are named by what makes them") {
  const auto& channel = result().spectra.front().result.channels.front();
  REQUIRE_FALSE(channel.peaks.empty());
  CHECK(channel.peaks.front().cause.text == "1x");
  const auto named = [&](double frequency_hz) {
    for (const step::SpectralPeak& peak : channel.peaks) {
      if (std::abs(peak.tone.frequency.value - frequency_hz) < 0.5) return peak.cause.text;
    }
    return std::string("not found");
  };
  CHECK(named(6 * skid().drive.speed_hz).find("vane pass") != std::string::npos);
  CHECK(named(2 * skid().drive.line_hz).find("twice line frequency") != std::string::npos);
}

TEST_CASE("the vibration that remains with the specified absorber is what the skid does with it") {
  const step::AbsorberResult& sized = result().absorbers.front().result;
  REQUIRE(sized.specification);
  REQUIRE(sized.specification->absorber);
  REQUIRE(sized.specification->predicted);
  const absorber::AbsorberData& data = *sized.specification->absorber;
  const absorber::Predicted& predicted = *sized.specification->predicted;

  simulate::SkidFile fitted = skid();
  const std::size_t point = point_of(predicted.point);
  fitted.absorber = simulate::FittedAbsorber{point, data.mass_kg, data.frequency_hz, data.damping_ratio};
  const simulate::Truth at_duty = simulate::truth_of(fitted);
  REQUIRE(at_duty.after);
  const double before = at_duty.before.overall_rms[point];
  check_remaining(predicted.at_duty.value, at_duty.after->overall_rms[point], before);

  // Over the forcing range the worst end counts.
  double worst = 0.0;
  for (const double speed : {sized.question.forcing.range_hz.lo, sized.question.forcing.range_hz.hi}) {
    fitted.drive.speed_hz = speed;
    worst = std::max(worst, simulate::truth_of(fitted).after->overall_rms[point]);
  }
  check_remaining(predicted.after.value, worst, before);
  CHECK(predicted.worst_case >= worst * 0.9);

  // The other points, as far as this mode moves them.
  for (const absorber::Predicted& other : sized.specification->others) {
    const std::size_t at = point_of(other.point);
    fitted.drive.speed_hz = skid().drive.speed_hz;
    CAPTURE(other.point);
    check_remaining(other.at_duty.value, simulate::truth_of(fitted).after->overall_rms[at],
                    at_duty.before.overall_rms[at]);
  }
}

TEST_CASE("what the fitted absorber achieved is measured as the skid did it") {
  REQUIRE(truth().after);
  REQUIRE_FALSE(result().after.empty());
  for (const survey::AfterPoint& each : result().after) {
    const std::size_t point = point_of(each.point);
    CAPTURE(each.point);
    check_remaining(each.after.value, truth().after->overall_rms[point], truth().before.overall_rms[point]);
  }
}

TEST_CASE("the coast-down passes too fast for damping, and the survey says so") {
  REQUIRE(result().runups.size() == 1);
  const step::RunupResult& runup = result().runups.front().result;
  REQUIRE(runup.runup);
  CHECK(runup.runup->speed.trend() == rotation::Trend::coast_down);
  CHECK(runup.runup->speed.speed_range().hi == Approx(skid().drive.speed_hz).epsilon(0.01));
  for (const step::CriticalSpeedFound& each : runup.critical_speeds) {
    // What is given comes from the hammer test, nothing from the flanks of a peak that the sweep has made.
    if (each.amplification_factor) CHECK(each.mode->state == "stopped");
  }
  CHECK(std::any_of(runup.findings.begin(), runup.findings.end(),
                    [](const base::Finding& each) { return each.code == base::Code::sweep_too_fast; }));
}

TEST_CASE("the survey gives the same bits on one thread and on three") {
  base::Context context;
  context.threads = 3;
  const survey::SurveyResult other = survey::run(survey::read_survey(tests::demo_file("survey.toml")), context);
  REQUIRE(other.modes.size() == result().modes.size());
  for (std::size_t i = 0; i < other.modes.size(); ++i) {
    CHECK(other.modes[i].frequency.value == result().modes[i].frequency.value);
    CHECK(other.modes[i].damping_ratio.value == result().modes[i].damping_ratio.value);
  }
  const auto& a = other.absorbers.front().result.specification;
  const auto& b = result().absorbers.front().result.specification;
  CHECK(a->absorber->mass_kg == b->absorber->mass_kg);
  CHECK(a->predicted->after.value == b->predicted->after.value);
  CHECK(a->predicted->worst_case == b->predicted->worst_case);
  for (std::size_t i = 0; i < other.spectra.size(); ++i) {
    for (std::size_t c = 0; c < other.spectra[i].result.channels.size(); ++c) {
      CHECK(other.spectra[i].result.channels[c].measured.density ==
            result().spectra[i].result.channels[c].measured.density);
    }
  }
}
