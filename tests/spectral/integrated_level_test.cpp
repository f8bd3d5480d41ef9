#include <algorithm>
#include <cmath>
#include <cstdint>
#include <numbers>
#include <vector>

#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/signals.hpp"
#include "spectral/strong_lines.hpp"
#include "spectral/window_transform.hpp"
#include "support/catch.hpp"

// Levels of integrated spectra against the signal's own: a tone of a m/s2 is a / (2 pi f) m/s, white acceleration of
// density S is S / (2 pi f)^2 (exact; integrals in closed form).

using namespace stillmass;
using base::Quantity;
using spectral::Spectrum;
using spectral::Window;

namespace {

constexpr double rate = 2048.0;
constexpr std::size_t n = 2048;  // lines 1 Hz apart
constexpr double top = 1000.0;
constexpr Window tapered[] = {Window::hann, Window::hamming, Window::blackman_harris, Window::flat_top};

std::vector<double> noise_of(double rms, std::uint64_t case_number, std::size_t blocks = 16) {
  auto x = tests::noise(n * (blocks + 1) / 2, 71, case_number);
  for (double& v : x) v *= rms;
  return x;
}

Spectrum integrated(std::vector<double> x, Window window = Window::hann, Quantity to = Quantity::velocity) {
  for (double& v : x) v += 3.0;  // the sensor's offset
  const auto s = spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.window = window, .block_frames = n});
  return spectral::as_quantity(s, to);
}

double angular(double f) { return 2.0 * std::numbers::pi * f; }

/// Mean square velocity of white acceleration noise of that r.m.s. value in a band.
double noise_velocity(double rms, double lo, double hi) {
  return rms * rms * 2.0 / rate * (1.0 / lo - 1.0 / hi) / (4.0 * std::numbers::pi * std::numbers::pi);
}

}  // namespace

TEST_CASE("the velocity of a tone at the lowest lines is within 0.1 percent, wherever it stands between lines") {
  for (const Window window : tapered) {
    const double low = spectral::lobe_bins(window);
    for (const double past : {0.0, 0.3, 0.5, 1.0, 1.25, 1.5, 2.0, 3.0, 5.25, 8.0, 18.3, 48.5}) {
      auto x = noise_of(0.0, 0);
      tests::add_tone(x, rate, low + past, 1.0, 0.4);
      const auto velocity = integrated(x, window);
      CAPTURE(spectral::name(window), low + past);
      CHECK(spectral::least_low_limit_hz(velocity) == low);
      CHECK(spectral::band_rms(velocity, {low, top}).value == Approx(1.0 / angular(low + past)).epsilon(1.1e-3));
      const auto displacement = integrated(x, window, Quantity::displacement);
      CHECK(spectral::band_rms(displacement, {low, top}).value ==
            Approx(1.0 / std::pow(angular(low + past), 2)).epsilon(3e-3));
    }
  }
}

TEST_CASE("the velocity of a tone in noise is within 0.5 percent and its uncertainty says how near") {
  // Noise 20 dB below the tone in all, 20 cases a row: mean within 0.1 %, each within 0.5 %, scatter as claimed (known
  // to 16 %; the claim takes overlapping blocks as independent, which is up to 1.5 too little beside a steady tone).
  for (const Window window : tapered) {
    const double low = spectral::lobe_bins(window);
    for (const double past : {0.0, 0.3, 0.5, 1.0, 2.0, 5.25, 8.0}) {
      double mean = 0.0, square = 0.0, claimed = 0.0;
      constexpr int cases = 20;
      for (std::uint64_t c = 0; c < cases; ++c) {
        auto x = noise_of(0.1, c);
        tests::add_tone(x, rate, low + past, 1.0, static_cast<double>(c));
        const auto level = spectral::band_rms(integrated(x, window), {low, top});
        const double exact = std::sqrt(1.0 / std::pow(angular(low + past), 2) + noise_velocity(0.1, low, top));
        const double error = level.value / exact - 1.0;
        CAPTURE(spectral::name(window), low + past, c);
        CHECK(std::abs(error) < 5e-3);
        mean += error / cases;
        square += error * error / cases;
        claimed += *level.u / exact / cases;
      }
      CAPTURE(spectral::name(window), low + past);
      CHECK(std::abs(mean) < 1e-3);
      CHECK(claimed > 0.45 * std::sqrt(square));
      CHECK(claimed < 2.5 * std::sqrt(square));
    }
  }
}

TEST_CASE("the velocity of white acceleration noise is exact: neither the lowest lines nor the edges make it high") {
  // An even density is its own mean over a lobe, so the expected level is the closed integral, to rounding.
  Spectrum s;
  s.rate_hz = rate;
  s.line_hz = 1.0;
  s.density.assign(1025, 2.0 / rate);
  s.density.front() = s.density.back() = 1.0 / rate;
  s.noise_bandwidth_hz = 1.5;
  s.blocks = 1;
  const auto velocity = spectral::as_quantity(s, Quantity::velocity);
  for (const double lo : {2.0, 2.25, 3.5, 10.0}) {
    CHECK(spectral::band_rms(velocity, {lo, top}).value ==
          Approx(std::sqrt(noise_velocity(1.0, lo, top))).epsilon(1e-12));
  }
  // 150 cases of 64 half-overlapped blocks: the mean is known to 0.2 to 0.6 %; limit 4 times what its u says.
  for (const Window window : {Window::hann, Window::flat_top}) {
    const double low = spectral::lobe_bins(window);
    for (const double hi : {low + 3.0, top}) {
      double mean = 0.0;
      double u = 0.0;
      constexpr std::uint64_t cases = 150;
      for (std::uint64_t c = 0; c < cases; ++c) {
        const auto level = spectral::band_rms(integrated(noise_of(1.0, c, 64), window), {low, hi});
        mean += level.value * level.value / cases;
        u += *level.u / level.value / cases;
      }
      CAPTURE(spectral::name(window), hi);
      CHECK(std::abs(std::sqrt(mean / noise_velocity(1.0, low, hi)) - 1.0) < 4.0 * u / std::sqrt(cases));
    }
  }
}

TEST_CASE("two tones near the low limit are both counted at their own frequency, even where their lobes overlap") {
  for (const double second : {7.6, 6.2, 5.7}) {
    auto x = noise_of(0.001, 3, 64);
    tests::add_tone(x, rate, 3.3, 1.0, 0.2);
    tests::add_tone(x, rate, second, 0.5, 1.2);
    const auto velocity = integrated(x);
    CAPTURE(second);
    REQUIRE(velocity.strong_lines.size() == 2);
    CHECK(std::abs(velocity.strong_lines[0].frequency_hz - 3.3) < 2e-3);
    CHECK(std::abs(velocity.strong_lines[1].frequency_hz - second) < 6e-3);
    const double exact = std::hypot(1.0 / angular(3.3), 0.5 / angular(second));
    CHECK(spectral::band_rms(velocity, {2.0, top}).value == Approx(exact).epsilon(1e-3));
  }
}

TEST_CASE("two tones too close to be parted are one lobe, and the uncertainty says it") {
  std::vector<double> x = noise_of(0.0, 0);
  tests::add_tone(x, rate, 4.0, 1.0, 0.2);
  tests::add_tone(x, rate, 5.5, 1.0, 1.2);
  const double exact = std::hypot(1.0 / angular(4.0), 1.0 / angular(5.5));
  const auto level = spectral::band_rms(integrated(x), {2.0, top});
  CHECK(std::abs(level.value - exact) < 2.0 * *level.u);
  CHECK(*level.u < 0.1 * exact);
}

TEST_CASE("a lobe that no tone explains has its doubt in the uncertainty though no block scatters") {
  // A tone that wanders evenly over some lines, in the mean over many blocks: its lobe is the mean of lobes, its
  // velocity the mean over the frequencies it passed.
  for (const double swing : {0.2, 1.0, 2.0, 3.0}) {
    Spectrum s;
    s.rate_hz = rate;
    s.line_hz = 1.0;
    s.noise_bandwidth_hz = 1.5;
    s.blocks = 16;
    s.effective_averages = 15.0;
    s.density.assign(1025, 1e-9);
    s.spread.assign(1025, 0.0);
    double square = 0.0;
    constexpr int steps = 200;
    std::vector<double> shares(40);
    for (int i = 0; i < steps; ++i) {
      const double f = 6.1 + swing * ((i + 0.5) / steps - 0.5);
      spectral::lobe_shares(Window::hann, 1.5, f, 0, shares);
      for (std::size_t k = 0; k < shares.size(); ++k) s.density[k] += shares[k] / steps;
      square += 1.0 / std::pow(angular(f), 2) / steps;
    }
    const auto level = spectral::band_rms(spectral::as_quantity(s, Quantity::velocity), {2.0, top});
    const double error = level.value / std::sqrt(square) - 1.0;
    CAPTURE(swing, error, *level.u / level.value);
    CHECK(std::abs(error) < std::max(5e-3, 1.2 * *level.u / level.value));
    CHECK(*level.u < 0.03 * level.value);
    if (swing > 1.5) CHECK(*level.u > 0.25 * std::abs(error) * level.value);
  }
}

TEST_CASE("a tone below the low limit is not counted, nor are its skirts") {
  // At 1.4 Hz: line 2 holds 55 % of its power there; the band begins at 2 Hz.
  auto x = noise_of(0.02, 4);
  tests::add_tone(x, rate, 1.4, 1.0, 0.3);
  tests::add_tone(x, rate, 40.0, 1.0, 0.3);
  const auto velocity = integrated(x);
  CHECK(velocity.first_line == 2);
  CHECK(spectral::band_rms(velocity, {2.0, top}).value == Approx(1.0 / angular(40.0)).epsilon(0.05));
}

TEST_CASE("a tone on the edge of a band is whole however fine the lines are") {
  std::vector<double> x(1 << 17, 0.0);
  tests::add_tone(x, rate, 10.0, 1.0);
  for (const std::size_t block : {1024, 2048, 16384, 65536}) {
    const auto s = spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.block_frames = block});
    const auto velocity = spectral::as_quantity(s, Quantity::velocity);
    CAPTURE(block);
    CHECK(spectral::band_rms(velocity, {10.0, top}).value == Approx(1.0 / angular(10.0)).epsilon(2e-3));
  }
}

TEST_CASE("a tone counts whole in a band that holds it and in none that does not") {
  auto x = noise_of(0.001, 5);
  tests::add_tone(x, rate, 10.0, 1.0);
  const auto velocity = integrated(x);
  const double exact = 1.0 / angular(10.0);
  CHECK(spectral::band_rms(velocity, {10.0, top}).value == Approx(exact).epsilon(2e-3));
  CHECK(spectral::band_rms(velocity, {2.0, 10.0}).value == Approx(exact).epsilon(2e-3));
  CHECK(spectral::band_rms(velocity, {10.6, top}).value < 0.05 * exact);
  // Third octaves: the one about 10 Hz has it all; they add up to their band.
  const auto thirds = spectral::third_octaves(velocity, {2.0, 900.0});
  double sum = 0.0;
  for (const auto& band : thirds.bands) {
    sum += band.rms.value * band.rms.value;
    if (band.nominal_hz != 10.0) CHECK(band.rms.value < 0.02 * exact);
  }
  const double all =
      spectral::band_rms(velocity, {thirds.bands.front().band_hz.lo, thirds.bands.back().band_hz.hi}).value;
  CHECK(sum == Approx(all * all).epsilon(1e-9));
}

TEST_CASE("a tone beside the edge of two third octaves counts in one of them") {
  // The bands of 40 and 50 Hz meet at 10^1.65 = 44.668 Hz.
  auto x = noise_of(0.001, 7);
  tests::add_tone(x, rate, 44.5, 1.0);
  const auto thirds = spectral::third_octaves(integrated(x), {30.0, 900.0});
  REQUIRE(thirds.bands.size() > 2);
  for (const auto& band : thirds.bands) {
    if (band.nominal_hz == 40.0) CHECK(band.rms.value == Approx(1.0 / angular(44.5)).epsilon(2e-3));
    if (band.nominal_hz == 50.0) CHECK(band.rms.value < 0.03 / angular(44.5));
  }
}

TEST_CASE("noise alone has no strong lines, and going back to acceleration forgets them") {
  int found = 0;
  for (std::uint64_t c = 0; c < 50; ++c) found += static_cast<int>(integrated(noise_of(1.0, c)).strong_lines.size());
  CHECK(found <= 1);
  auto x = noise_of(0.01, 6);
  tests::add_tone(x, rate, 6.2, 1.0);
  const auto velocity = integrated(x);
  REQUIRE(velocity.strong_lines.size() == 1);
  CHECK(velocity.strong_lines[0].frequency_hz == Approx(6.2).epsilon(1e-3));
  CHECK(std::abs(velocity.strong_lines[0].frequency_hz - 6.2) < 4.0 * velocity.strong_lines[0].u_hz);
  CHECK(spectral::as_quantity(velocity, Quantity::acceleration).strong_lines.empty());
  CHECK(spectral::as_quantity(velocity, Quantity::displacement).strong_lines.size() == 1);
}

TEST_CASE("the shares of a tone's lobe are the window's transform and add up to 1") {
  for (const Window window : tapered) {
    const double bins = spectral::noise_bandwidth_bins(spectral::samples(window, 4096));
    for (const double place : {40.0, 40.2, 40.5}) {
      std::vector<double> shares(81);
      spectral::lobe_shares(window, bins, place, 0, shares);
      double sum = 0.0;
      for (std::size_t k = 0; k < shares.size(); ++k) {
        sum += shares[k];
        const double amplitude = spectral::transform(window, static_cast<double>(k) - place);
        CHECK(std::abs(shares[k] - amplitude * amplitude / bins) < 1e-12);
      }
      CHECK(sum == Approx(1.0).epsilon(2e-4));  // the Hamming window's side lobes reach farther
    }
  }
}
