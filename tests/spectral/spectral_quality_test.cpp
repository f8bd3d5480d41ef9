#include "stillmass/spectral/spectral_quality.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <string>

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using base::Code;

namespace {

constexpr double rate = 2000.0;

spectral::Spectrum spectrum(const std::vector<double>& x) {
  return spectral::averaged_spectrum(x, rate, base::Quantity::acceleration, {.block_frames = 2000});
}

/// Noise that an anti-alias filter would leave: a running mean over four samples, 0 at 500 and 1000 Hz.
std::vector<double> rolled_off(std::uint64_t seed) {
  const auto n = tests::noise(40000, seed);
  std::vector<double> x(n.size(), 0.0);
  for (std::size_t i = 3; i < n.size(); ++i) x[i] = 0.25 * (n[i] + n[i - 1] + n[i - 2] + n[i - 3]);
  return x;
}

bool has(const std::vector<base::Finding>& findings, Code code) {
  return std::any_of(findings.begin(), findings.end(), [&](const auto& f) { return f.code == code; });
}

}  // namespace

TEST_CASE("a sound recording has no finding") {
  auto x = rolled_off(61);
  for (double& v : x) v *= 0.1;
  tests::add_tone(x, rate, 24.63, 1.0);
  tests::add_tone(x, rate, 49.26, 0.3);
  tests::add_tone(x, rate, 100.0, 0.5);  // twice the supply's frequency: a force that motors have
  recording::Channel channel;
  channel.stored_step = 1e-5;
  CHECK(spectral::spectral_findings(spectrum(x), channel).empty());
}

TEST_CASE("a slow fan's tone is no low-frequency slope") {
  auto x = rolled_off(62);
  for (double& v : x) v *= 0.05;
  tests::add_tone(x, rate, 3.0, 1.0);
  CHECK_FALSE(has(spectral::spectral_findings(spectrum(x), {}), Code::low_frequency_slope));
}

TEST_CASE("hum of the electric supply is named, at 50 and at 60 Hz") {
  for (const double supply : {50.0, 60.02}) {
    auto x = rolled_off(63);
    for (double& v : x) v *= 0.2;
    tests::add_tone(x, rate, supply, 0.3);
    tests::add_tone(x, rate, 3.0 * supply, 0.2);
    CHECK(has(spectral::spectral_findings(spectrum(x), {}), Code::mains_hum));
    CHECK(has(spectral::spectral_findings(spectrum(x), {}, std::round(supply)), Code::mains_hum));
    CHECK_FALSE(has(spectral::spectral_findings(spectrum(x), {}, supply < 55.0 ? 60.0 : 50.0), Code::mains_hum));
  }
}

namespace {

const base::Finding& the(const std::vector<base::Finding>& findings, Code code) {
  const auto at = std::find_if(findings.begin(), findings.end(), [&](const auto& f) { return f.code == code; });
  REQUIRE(at != findings.end());
  return *at;
}

double number_after(const base::Finding& finding, const std::string& word) {
  const auto at = finding.text.find(word);
  REQUIRE(at != std::string::npos);
  return std::stod(finding.text.substr(at + word.size()));
}

}  // namespace

TEST_CASE("the share of the hum is that of the mean squares") {
  auto x = rolled_off(71);
  double square = 0.0;
  for (double& v : x) {
    v *= 0.4;
    square += v * v / static_cast<double>(x.size());
  }
  tests::add_tone(x, rate, 50.0, 0.15);
  tests::add_tone(x, rate, 150.0, 0.10);
  const auto findings = spectral::spectral_findings(spectrum(x), {});
  const double share = (0.15 * 0.15 + 0.10 * 0.10) / (square + 0.15 * 0.15 + 0.10 * 0.10);
  CHECK(std::stod(the(findings, Code::mains_hum).text) == Approx(100.0 * share).epsilon(0.05));
}

TEST_CASE(
    "a sensor's resonance on its mounting is named where it is, and the limit is where its response is 10 % too high") {
  constexpr double fast = 12800.0;
  constexpr double resonance_hz = 1500.0;
  const double w = 2.0 * std::numbers::pi * resonance_hz / fast;
  const double r = std::exp(-w / 30.0);  // Q of 15
  const double c = 2.0 * r * std::cos(w);
  auto x = tests::noise(200000, 72);
  double y1 = 0.0;
  double y2 = 0.0;
  double before = 0.0;
  for (double& v : x) {
    const double in = 0.5 * (v + before);  // nothing at half the rate, as behind a filter
    before = v;
    const double y = (1.0 - c + r * r) * in + c * y1 - r * r * y2;
    y2 = y1;
    y1 = y;
    v = y;
  }
  const auto findings = spectral::spectral_findings(
      spectral::averaged_spectrum(x, fast, base::Quantity::acceleration, {.block_frames = 6400}), {});
  const base::Finding& found = the(findings, Code::mounting_resonance);
  CHECK(number_after(found, "near ") == Approx(resonance_hz).epsilon(0.08));
  const double limit_hz = number_after(found, "10 % below ");
  const double ratio = limit_hz / number_after(found, "near ");
  CHECK(1.0 / (1.0 - ratio * ratio) == Approx(1.10).epsilon(0.005));  // one degree of freedom, little damping
}

TEST_CASE("drift that integration would blow up is a low-frequency slope, and its end is given") {
  auto x = rolled_off(64);
  const auto n = tests::noise(x.size(), 65);
  double drift = 0.0;
  for (std::size_t i = 0; i < x.size(); ++i) {
    drift = 0.999 * drift + 0.02 * n[i];
    x[i] = 0.02 * x[i] + drift;
  }
  const auto s = spectrum(x);
  CHECK(has(spectral::spectral_findings(s, {}), Code::low_frequency_slope));
  REQUIRE(spectral::slope_end_hz(s).has_value());
  CHECK(*spectral::slope_end_hz(s) >= 8.0);
  CHECK_FALSE(spectral::slope_end_hz(spectrum(rolled_off(66))).has_value());
}

TEST_CASE("a spectrum that does not fall off before half the rate is suspected of aliasing") {
  CHECK(has(spectral::spectral_findings(spectrum(tests::noise(40000, 67)), {}), Code::aliasing_suspected));
  CHECK_FALSE(has(spectral::spectral_findings(spectrum(rolled_off(68)), {}), Code::aliasing_suspected));
}

TEST_CASE("a signal of a few steps of the recorder is near its noise floor") {
  auto x = rolled_off(69);
  for (double& v : x) v = std::round(v * 0.6);
  recording::Channel channel;
  channel.stored_step = 1.0;
  CHECK(has(spectral::spectral_findings(spectrum(x), channel), Code::near_noise_floor));
  for (double& v : x) v *= 1.0;
  channel.stored_step = 1e-4;
  CHECK_FALSE(has(spectral::spectral_findings(spectrum(x), channel), Code::near_noise_floor));
}

TEST_CASE("silence, a tacho and an empty spectrum have no spectral finding") {
  CHECK(spectral::spectral_findings(spectrum(std::vector<double>(40000, 0.0)), {}).empty());
  recording::Channel tacho;
  tacho.role = recording::Role::tacho;
  CHECK(spectral::spectral_findings(spectrum(tests::noise(40000, 70)), tacho).empty());
  CHECK(spectral::spectral_findings({}, {}).empty());
}
