#include "stillmass/spectral/calibrator.hpp"

#include <cmath>
#include <numbers>

#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;

namespace {

constexpr double rate = 6400.0;
// A handheld exciter turns at 1000 rad/s and gives 10 m/s2 r.m.s. (common practice; CHECKS C1: 159.155 Hz by
// arithmetic).
constexpr double tone_hz = 159.15494;

base::Answer<spectral::Calibration> calibrated(std::vector<double> samples, const spectral::CalibratorTone& tone = {},
                                               base::Quantity quantity = base::Quantity::acceleration) {
  const auto frames = static_cast<std::int64_t>(samples.size());
  const tests::MemoryReader reader(rate, {{"a", std::move(samples), quantity}});
  return spectral::calibrate(reader, {0, frames}, 0, tone, {});
}

std::vector<double> exciter(double rms, double frequency_hz = tone_hz, double noise = 0.02, std::uint64_t seed = 1) {
  auto x = tests::noise(64000, seed);
  for (double& v : x) v *= noise;
  tests::add_tone(x, rate, frequency_hz, rms);
  return x;
}

// A free mass under half-sine blows: a = F / m (Newton).
struct Blows {
  std::vector<std::vector<double>> force;
  std::vector<std::vector<double>> response;
  std::vector<spectral::HitBlock> blocks() const {
    std::vector<spectral::HitBlock> out;
    for (std::size_t i = 0; i < force.size(); ++i) out.push_back({force[i], response[i]});
    return out;
  }
};

Blows blows_on(double mass_kg, double force_factor, double noise = 1e-3) {
  Blows out;
  for (int blow = 0; blow < 5; ++blow) {
    std::vector<double> force(4096, 0.0);
    for (int i = 0; i < 13; ++i) {
      force[static_cast<std::size_t>(200 + i)] = (300.0 + 40.0 * blow) * std::sin(std::numbers::pi * (i + 0.5) / 13.0);
    }
    const auto n1 = tests::noise(force.size(), 7, static_cast<std::uint64_t>(2 * blow));
    const auto n2 = tests::noise(force.size(), 7, static_cast<std::uint64_t>(2 * blow + 1));
    std::vector<double> response(force.size());
    for (std::size_t i = 0; i < force.size(); ++i) {
      response[i] = force[i] / mass_kg + noise * n1[i];
      force[i] = force[i] * force_factor + 10.0 * noise * n2[i];
    }
    out.force.push_back(std::move(force));
    out.response.push_back(std::move(response));
  }
  return out;
}

spectral::HitWindows windows() {
  spectral::HitWindows w;
  w.pre_trigger = 190;
  return w;
}

}  // namespace

TEST_CASE("a sensor as stated needs no correction, one that reads 4 % low is raised by as much") {
  const auto right = calibrated(exciter(10.0));
  REQUIRE(right);
  CHECK(right->frequency_hz == Approx(tone_hz).epsilon(1e-4));
  CHECK(right->measured.value == Approx(10.0).epsilon(2e-3));
  CHECK(right->correction.value == Approx(1.0).epsilon(2e-3));
  CHECK(*right->correction.relative() == Approx(0.015).epsilon(0.02));  // the calibrator's own, 3 % at k = 2
  CHECK(right->suspicion.empty());
  CHECK(calibrated(exciter(9.6))->correction.value == Approx(10.0 / 9.6).epsilon(2e-3));
}

TEST_CASE("the uncertainty of a noisy calibration holds the truth 95 times in a hundred") {
  int held = 0;
  constexpr int tried = 200;
  for (int i = 0; i < tried; ++i) {
    spectral::CalibratorTone tone;
    tone.relative_u = 1e-9;  // the recording's part alone
    const auto one = calibrated(exciter(10.0, tone_hz, 10.0, static_cast<std::uint64_t>(100 + i)), tone);
    REQUIRE(one);
    held += std::abs(one->correction.value - 1.0) <= 2.0 * *one->correction.u ? 1 : 0;
  }
  // Binomial, 95.4 % of 200: 3 standard deviations are 9; wider is no fault that misleads.
  CHECK(held >= 181);
}

TEST_CASE("a level that a usual mix-up explains is named, and no other") {
  struct Case {
    double ratio;
    const char* says;
  };
  for (const Case& each : {Case{9.80665, "9.81 times too much"}, Case{1.0 / 9.80665, "9.81 times too little"},
                           Case{std::sqrt(2.0), "peak value was taken for r.m.s."},
                           Case{std::sqrt(0.5), "taken for a peak"}, Case{2.0 * std::sqrt(2.0), "peak-to-peak"},
                           Case{25.4, "inches"}, Case{1000.0, "1000 times"}, Case{3.3, "no usual mix-up"}}) {
    const auto found = calibrated(exciter(10.0 * each.ratio, tone_hz, 0.002));
    REQUIRE(found);
    INFO(found->suspicion);
    CHECK(found->suspicion.find(each.says) != std::string::npos);
  }
  CHECK(spectral::suspicion_of(1.09).empty());
  CHECK(spectral::suspicion_of(0.91).empty());
}

TEST_CASE("a dead sensor, another frequency and a wandering level are refused") {
  const auto dead = calibrated(exciter(0.0));
  REQUIRE_FALSE(dead);
  CHECK(dead.refusal().code == "no-calibrator-tone");
  const auto weak = calibrated(exciter(0.05, tone_hz, 1e-4));
  REQUIRE(weak);
  CHECK(weak->suspicion.find("dead or not seated") != std::string::npos);
  const auto other = calibrated(exciter(10.0, 79.577));
  REQUIRE_FALSE(other);
  CHECK(other.refusal().seen.find("79.58 Hz") != std::string::npos);
  auto wandering = exciter(10.0);
  for (std::size_t i = 0; i < wandering.size(); ++i) {
    wandering[i] *= 1.0 + 0.5 * std::sin(2.0 * std::numbers::pi * 0.3 * static_cast<double>(i) / rate);
  }
  const auto unsteady = calibrated(std::move(wandering));
  REQUIRE_FALSE(unsteady);
  CHECK(unsteady.refusal().code == "unsteady-tone");
}

TEST_CASE("volts become m/s2 by the calibrator's level") {
  const auto volts = calibrated(exciter(0.102, tone_hz, 1e-4), {}, base::Quantity::voltage);  // 10.2 mV per m/s2
  REQUIRE(volts);
  CHECK(volts->correction.value == Approx(10.0 / 0.102).epsilon(1e-3));
  CHECK(volts->suspicion.empty());
}

TEST_CASE("on a hung mass mass times accelerance is one, and a hammer that reads 6 % high is found") {
  for (const double factor : {1.0, 1.06}) {
    const Blows blows = blows_on(9.7, factor);
    const auto found = spectral::calibrate_on_mass(blows.blocks(), rate, {9.7}, windows());
    REQUIRE(found);
    CHECK(found->measured.value == Approx(1.0 / factor).epsilon(1e-3));
    CHECK(found->correction.value == Approx(factor).epsilon(1e-3));
    CHECK(*found->correction.relative() < 0.005);
    CHECK(*found->correction.relative() >= 0.001);  // the weighed mass
    CHECK(found->band_hz.hi > 200.0);
    CHECK_FALSE(found->opposed);
    CHECK(found->suspicion.empty());
  }
  CHECK(spectral::calibrate_on_mass(blows_on(9.7, -1.0).blocks(), rate, {9.7}, windows())->opposed);
  const auto in_g = spectral::calibrate_on_mass(blows_on(9.7 * 9.80665, 1.0, 1e-4).blocks(), rate, {9.7}, windows());
  REQUIRE(in_g);
  CHECK(in_g->suspicion.find("9.81 times too little") != std::string::npos);
}

TEST_CASE("a mass that rings is not taken for a free one") {
  Blows blows = blows_on(9.7, 1.0, 0.0);
  for (std::size_t b = 0; b < blows.force.size(); ++b) {  // a light mode at 80 Hz takes over
    double y1 = 0.0;
    double y2 = 0.0;
    for (std::size_t i = 0; i < blows.force[b].size(); ++i) {
      const double y = blows.force[b][i] + 1.985 * y1 - 0.9911 * y2;
      blows.response[b][i] += 3.0 * (y - 2.0 * y1 + y2);
      y2 = y1;
      y1 = y;
    }
  }
  const auto found = spectral::calibrate_on_mass(blows.blocks(), rate, {9.7}, windows());
  CHECK((!found || !found->suspicion.empty()));
  // A body whose accelerance climbs steadily over the band has no level part.
  Blows climbing = blows_on(9.7, 1.0, 0.0);
  for (std::size_t b = 0; b < climbing.force.size(); ++b) {
    for (std::size_t i = climbing.force[b].size() - 1; i > 0; --i) {
      climbing.response[b][i] = (climbing.force[b][i] - 0.9 * climbing.force[b][i - 1]) / 9.7;
    }
  }
  const auto refused = spectral::calibrate_on_mass(climbing.blocks(), rate, {9.7}, windows());
  REQUIRE_FALSE(refused);
  CHECK(refused.refusal().code == "no-level-accelerance");
}
