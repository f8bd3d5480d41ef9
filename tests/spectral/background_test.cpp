#include "stillmass/spectral/background.hpp"

#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/level.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using spectral::Spectrum;
using spectral::SpectrumOptions;

namespace {

constexpr double rate = 2000.0;

Spectrum spectrum(const std::vector<double>& x, SpectrumOptions options = {.block_frames = 1000}) {
  return spectral::averaged_spectrum(x, rate, base::Quantity::velocity, options);
}

/// White noise of that r.m.s. value.
std::vector<double> noise(double rms, std::uint64_t seed, std::uint64_t case_number, std::size_t frames = 20000) {
  auto x = tests::noise(frames, seed, case_number);
  for (double& v : x) v *= rms;
  return x;
}

/// A spectrum with exact densities, K independent blocks of Gaussian noise.
Spectrum exact(double density, double averages = 50.0) {
  Spectrum s;
  s.quantity = base::Quantity::velocity;
  s.rate_hz = rate;
  s.line_hz = 2.0;
  s.density.assign(501, density);
  s.noise_bandwidth_hz = 3.0;
  s.blocks = static_cast<std::size_t>(averages);
  s.effective_averages = averages;
  s.spread.assign(501, 1.0);
  return s;
}

spectral::Tone tone(double hz, double rms, double u_hz = 0.01) {
  spectral::Tone t;
  t.frequency = {hz, u_hz, std::nullopt, base::Quantity::frequency};
  t.amplitude_rms = {rms, 0.01 * rms, std::nullopt, base::Quantity::velocity};
  return t;
}

}  // namespace

TEST_CASE("a background taken off in power leaves the machine's own level exactly") {
  // 5^2 = 3^2 + 4^2.
  const auto level = spectral::without_background(exact(25e-6), exact(9e-6), {10.0, 900.0});
  REQUIRE(level.machine);
  CHECK(level.machine->value == Approx(std::sqrt(16e-6 * 890.0)).epsilon(1e-12));
  CHECK(level.share.value == Approx(0.6).epsilon(1e-12));
  CHECK(level.is_doubtful);
  CHECK(level.machine->quantity == base::Quantity::velocity);
  // u by the law of propagation, JCGM 100 eq. 10, on sqrt(r^2 - b^2) with u_r / r = u_b / b (same bands, same blocks).
  const double relative = *level.running.u / level.running.value;
  CHECK(*level.machine->u == Approx(relative * std::hypot(25.0, 9.0) / 16.0 * level.machine->value).epsilon(1e-9));
}

TEST_CASE("the severity is doubtful from a quarter of the running level on") {
  CHECK_FALSE(spectral::without_background(exact(1.0), exact(0.249 * 0.249), {10.0, 900.0}).is_doubtful);
  CHECK(spectral::without_background(exact(1.0), exact(0.251 * 0.251), {10.0, 900.0}).is_doubtful);
}

TEST_CASE("the level without background holds its uncertainty in noise") {
  std::size_t within = 0, given = 0;
  constexpr std::size_t trials = 300;
  for (std::uint64_t i = 0; i < trials; ++i) {
    auto running = noise(1.0, 61, i);
    const auto neighbour = noise(0.7, 62, i);
    for (std::size_t n = 0; n < running.size(); ++n) running[n] += neighbour[n];
    const auto level = spectral::without_background(spectrum(running), spectrum(noise(0.7, 63, i)), {100.0, 300.0});
    if (!level.machine) continue;
    ++given;
    // Over 0 to rate/2 the machine has 1; the band has a fifth of the power.
    if (level.machine->interval95()->contains(std::sqrt(0.2))) ++within;
  }
  CHECK(given == trials);
  CHECK(within >= 273);  // 95 % of 300 are 285, three standard deviations 11
  CHECK(within <= 297);
}

TEST_CASE("a background that reaches the running level leaves no level but words") {
  const auto equal = spectral::without_background(exact(1.0), exact(1.0), {10.0, 900.0});
  REQUIRE_FALSE(equal.machine);
  CHECK(equal.machine.refusal().code == "background-covers-machine");
  CHECK(equal.machine.refusal().seen.find("10 to 900 Hz") != std::string::npos);
  CHECK_FALSE(spectral::without_background(exact(1.0), exact(2.0), {10.0, 900.0}).machine);
  // Greater by less than chance makes: 1 % with a standard uncertainty of some 2 % in power (445 lines, 50 blocks).
  CHECK_FALSE(spectral::without_background(exact(1.01, 4.0), exact(1.0, 4.0), {10.0, 900.0}).machine);
  // Without a known uncertainty only the sign is judged.
  auto one = exact(1.01), other = exact(1.0);
  one.spread.clear();
  other.spread.clear();
  const auto single = spectral::without_background(one, other, {10.0, 900.0});
  REQUIRE(single.machine);
  CHECK_FALSE(single.machine->u);
}

TEST_CASE("a machine that does nothing above its background is found out in nearly all recordings") {
  std::size_t given = 0;
  for (std::uint64_t i = 0; i < 200; ++i) {
    if (spectral::without_background(spectrum(noise(1.0, 64, i)), spectrum(noise(1.0, 65, i)), {100.0, 300.0})
            .machine) {
      ++given;
    }
  }
  CHECK(given <= 14);  // one side of two standard uncertainties: 2.3 % of 200, and the scatter of 19 blocks
}

TEST_CASE("bands are compared whatever the lines of the two spectra") {
  auto running = noise(1.0, 66, 0, 200000);
  tests::add_tone(running, rate, 151.3, 2.0);
  const auto background = noise(0.5, 67, 0, 200000);
  const auto level = spectral::without_background(spectrum(running, {.block_frames = 1000}),
                                                  spectrum(background, {.block_frames = 4096}), {100.0, 200.0});
  REQUIRE(level.machine);
  CHECK(level.machine->value == Approx(std::sqrt(4.0 + 0.1 - 0.025)).epsilon(0.01));
}

TEST_CASE("line by line the difference is never negative and carries the error of both") {
  const auto running = spectrum(noise(1.0, 68, 0)), background = spectrum(noise(0.8, 69, 0));
  const auto d = spectral::line_difference(running, background);
  REQUIRE(d.spectrum.density.size() == running.density.size());
  std::size_t zero = 0, covered = 0;
  for (std::size_t k = 0; k < d.spectrum.density.size(); ++k) {
    CHECK(d.spectrum.density[k] >= 0.0);
    CHECK(d.spectrum.density[k] == std::max(running.density[k] - background.density[k], 0.0));
    const double n = running.effective_averages;
    CHECK(*d.u[k] ==
          Approx(std::hypot(running.density[k] * running.spread[k], background.density[k] * background.spread[k]) /
                 std::sqrt(n)));
    if (d.spectrum.density[k] == 0.0) ++zero;
    if (d.is_covered[k]) ++covered;
    if (d.spectrum.density[k] > 0.0) {
      CHECK(d.spectrum.spread[k] / std::sqrt(d.spectrum.effective_averages) ==
            Approx(*d.u[k] / d.spectrum.density[k]).epsilon(1e-12));
    }
  }
  CHECK(zero > 0);
  CHECK(covered >= zero);
  CHECK(covered == d.covered);
}

TEST_CASE("the uncertainty of a line's difference holds in noise") {
  std::size_t within = 0, lines = 0;
  const double truth = 1.0 / (0.5 * rate);
  for (std::uint64_t i = 0; i < 10; ++i) {
    auto running = noise(1.0, 70, i, 60000);
    const auto neighbour = noise(0.5, 71, i, 60000);
    for (std::size_t n = 0; n < running.size(); ++n) running[n] += neighbour[n];
    const auto d = spectral::line_difference(spectrum(running), spectrum(noise(0.5, 72, i, 60000)));
    for (std::size_t k = 3; k + 3 < d.spectrum.density.size(); k += 4) {
      ++lines;
      if (std::abs(d.spectrum.density[k] - truth) < 1.96 * *d.u[k]) ++within;
    }
  }
  // 119 blocks: the scatter of a density is known within 10 %, which costs about a percent of 95.
  CHECK(static_cast<double>(within) > 0.92 * static_cast<double>(lines));
  CHECK(static_cast<double>(within) < 0.97 * static_cast<double>(lines));
}

TEST_CASE("spectra of other lines, windows or quantities are not subtracted line by line") {
  const auto x = noise(1.0, 73, 0);
  const auto a = spectrum(x);
  CHECK_THROWS_AS(spectral::line_difference(a, spectrum(x, {.block_frames = 500})), base::Error);
  CHECK_THROWS_AS(
      spectral::line_difference(a, spectrum(x, {.window = spectral::Window::flat_top, .block_frames = 1000})),
      base::Error);
  auto acceleration = a;
  acceleration.quantity = base::Quantity::acceleration;
  CHECK_THROWS_AS(spectral::line_difference(a, acceleration), base::Error);
  CHECK_THROWS_AS(spectral::without_background(a, acceleration, {10.0, 100.0}), base::Error);
  CHECK_THROWS_AS(spectral::without_background(a, a, {1100.0, 1200.0}), base::Error);
  // The same lines from half the rate reach as far as they reach.
  auto half = a;
  half.density.resize(251);
  half.spread.resize(251);
  half.rate_hz = 1000.0;
  const auto d = spectral::line_difference(a, half);
  CHECK(d.spectrum.density.size() == 251);
  CHECK(d.spectrum.rate_hz == Approx(1000.0));
}

TEST_CASE("a tone that the background has too is marked with its share and what may be the machine's") {
  const std::vector<spectral::Tone> running{tone(24.63, 1.0), tone(49.9, 0.5), tone(100.0, 0.2), tone(148.0, 0.1)};
  const std::vector<spectral::Tone> background{tone(24.60, 0.1), tone(49.8, 0.4), tone(50.1, 0.05), tone(149.0, 0.1)};
  const auto found = spectral::background_tones(running, background, 0.5);
  REQUIRE(found.size() == 2);
  CHECK(found[0].running == 0);
  CHECK(found[0].share.value == Approx(0.1));
  CHECK_FALSE(found[0].is_marked);
  CHECK(found[1].running == 1);
  CHECK(found[1].background == 1);
  CHECK(found[1].share.value == Approx(0.8));
  CHECK(*found[1].share.u == Approx(0.8 * 0.01 * std::numbers::sqrt2));
  CHECK(found[1].is_marked);
  CHECK(found[1].alone_rms.lo == Approx(0.1));
  CHECK(found[1].alone_rms.hi == Approx(0.9));
  CHECK(spectral::background_tones(running, background, 0.5, {.tolerance_hz = 1.5}).size() == 3);
  CHECK(spectral::background_tones(running, background, 0.5, {.least_share = 0.05})[0].is_marked);
}

TEST_CASE("the tones of a neighbour are found in measured spectra") {
  auto running = noise(0.05, 74, 0, 60000), background = noise(0.05, 74, 1, 60000);
  tests::add_tone(running, rate, 24.63, 1.0);
  tests::add_tone(running, rate, 99.37, 0.4, 0.3);
  tests::add_tone(background, rate, 99.37, 0.4, 1.9);
  const auto found =
      spectral::background_tones(spectral::tones(spectrum(running)), spectral::tones(spectrum(background)), 2.0);
  REQUIRE(found.size() == 1);
  CHECK(found[0].running == 1);
  CHECK(found[0].share.value == Approx(1.0).epsilon(0.02));
}
