#include "stillmass/spectral/level.hpp"

#include <cmath>
#include <numbers>
#include <utility>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/quantity.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using base::Quantity;
using spectral::Spectrum;

namespace {

constexpr double rate = 2000.0;

Spectrum spectrum(const std::vector<double>& x, std::size_t n = 1000) {
  return spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.block_frames = n});
}

/// Density 1 on every line from 0 to 10 Hz, 1 Hz apart.
Spectrum flat() {
  Spectrum s;
  s.rate_hz = 20.0;
  s.line_hz = 1.0;
  s.density.assign(11, 1.0);
  s.density.front() = 0.5;
  s.density.back() = 0.5;
  s.noise_bandwidth_hz = 1.5;
  s.blocks = 1;
  return s;
}

}  // namespace

TEST_CASE("a line on the edge of a band counts in part") {
  const auto mean_square = [](double lo, double hi) {
    const double rms = spectral::band_rms(flat(), {lo, hi}).value;
    return rms * rms;
  };
  CHECK(mean_square(2.5, 5.5) == Approx(3.0));
  CHECK(mean_square(2.75, 5.6) == Approx(2.85));
  CHECK(mean_square(3.1, 3.2) == Approx(0.1));
  CHECK(mean_square(0.0, 10.0) == Approx(10.0));
  CHECK(mean_square(9.5, 10.0) == Approx(0.5));
  CHECK(mean_square(0.0, 0.25) == Approx(0.25));
  CHECK_THROWS_AS(spectral::band_rms(flat(), {11.0, 12.0}), base::Error);
}

TEST_CASE("the level of tones is their power added, wherever they stand between lines") {
  std::vector<double> x(40000, 0.0);
  tests::add_tone(x, rate, 100.7, 3.0);
  tests::add_tone(x, rate, 301.1, 4.0);
  const auto level = spectral::band_rms(spectrum(x), {10.0, 1000.0});
  CHECK(level.value == Approx(5.0).epsilon(1e-4));  // Hann skirts below 10 Hz hold less
  CHECK(level.quantity == Quantity::acceleration);
  CHECK(*level.u < 1e-3);
}

TEST_CASE("a level without scatter to judge by has no uncertainty") {
  const auto x = tests::noise(1000, 41);
  CHECK_FALSE(spectral::band_rms(spectrum(x), {10.0, 100.0}).u.has_value());
}

TEST_CASE("the uncertainty of a noise level is the scatter of levels") {
  // 600 noises: the scatter is known to 2.9 %, limit 10 %. Independent of the estimate: 1/(2 sqrt(B T)), B T = 1000.
  double sum = 0.0, squares = 0.0, claimed = 0.0;
  constexpr int cases = 600;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const auto level = spectral::band_rms(spectrum(tests::noise(10500, 42, c), 500), {100.0, 300.5});
    sum += level.value;
    squares += level.value * level.value;
    claimed += *level.u / cases;
  }
  const double mean = sum / cases;
  const double scatter = std::sqrt(squares / cases - mean * mean);
  CHECK(claimed == Approx(scatter).epsilon(0.10));
  CHECK(scatter / mean == Approx(0.5 / std::sqrt(200.5 * 5.25)).epsilon(0.10));
}

TEST_CASE("integration divides a tone by 2 pi f and differentiation brings it back") {
  std::vector<double> x(40000, 0.0);
  tests::add_tone(x, rate, 80.0, 10.0);
  const auto a = spectrum(x);
  const auto v = spectral::as_quantity(a, Quantity::velocity);
  const auto d = spectral::as_quantity(v, Quantity::displacement, 20.0);
  const double omega = 2.0 * std::numbers::pi * 80.0;
  CHECK(v.amplitude_rms(40) == Approx(10.0 / omega).epsilon(1e-12));
  CHECK(d.amplitude_rms(40) == Approx(10.0 / omega / omega).epsilon(1e-12));
  CHECK(d.first_line == 10);
  CHECK(d.density[9] == 0.0);
  CHECK(d.integrations == 2);
  const auto back = spectral::as_quantity(d, Quantity::acceleration);
  CHECK(back.density[40] == Approx(a.density[40]).epsilon(1e-12));
  CHECK(back.first_line == 10);  // what was not given does not come back
  CHECK(back.integrations == 0);
}

TEST_CASE("a calibrator at 1000 rad/s shows 10 m/s2, 10 mm/s and 10 um") {
  // CHECKS C1: exact.
  std::vector<double> x(200000, 0.0);
  tests::add_tone(x, rate, 1000.0 / (2.0 * std::numbers::pi), 10.0);
  const auto a = spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.block_frames = 4000});
  const base::Interval band{100.0, 250.0};
  // Line by line integration of a tone between lines 0.5 Hz apart: of order (0.5/159)^2.
  CHECK(spectral::band_rms(spectral::as_quantity(a, Quantity::velocity), band).value == Approx(10e-3).epsilon(3e-5));
  CHECK(spectral::band_rms(spectral::as_quantity(a, Quantity::displacement), band).value ==
        Approx(10e-6).epsilon(6e-5));
}

TEST_CASE("what leaks from a sensor's offset is not integrated") {
  std::vector<double> x(40000, 9.81);
  tests::add_tone(x, rate, 50.0, 1.0);
  const auto v = spectral::as_quantity(spectrum(x), Quantity::velocity);
  CHECK(v.first_line == 2);
  CHECK(spectral::band_rms(v, {0.0, 1000.0}).value == Approx(1.0 / (100.0 * std::numbers::pi)).epsilon(0.002));
}

TEST_CASE("force is no acceleration") {
  auto s = flat();
  s.quantity = Quantity::force;
  CHECK_THROWS_AS(spectral::as_quantity(s, Quantity::velocity), base::Error);
  CHECK_FALSE(spectral::integrations_between(Quantity::force, Quantity::velocity).has_value());
  CHECK(spectral::as_quantity(s, Quantity::force).density == s.density);
}

TEST_CASE("third-octave bands meet at their edges and add up to the band") {
  const auto s = spectrum(tests::noise(40000, 43));
  const auto bands = spectral::third_octaves(s, {20.0, 900.0}).bands;
  REQUIRE(bands.size() > 8);
  double sum = 0.0;
  for (std::size_t i = 0; i < bands.size(); ++i) {
    sum += bands[i].rms.value * bands[i].rms.value;
    if (i > 0) CHECK(bands[i].band_hz.lo == Approx(bands[i - 1].band_hz.hi));
    CHECK(bands[i].band_hz.width() >= 2.0 * s.noise_bandwidth_hz);
  }
  const double all = spectral::band_rms(s, {bands.front().band_hz.lo, bands.back().band_hz.hi}).value;
  CHECK(sum == Approx(all * all).epsilon(1e-10));
  // IEC 61260-1, from memory: exact mid-band frequency 1000 * 10^(-1/10) = 794.33 Hz, edges 707.95 and 891.25 Hz.
  CHECK(bands.back().centre_hz == Approx(794.33).epsilon(1e-5));
  CHECK(bands.back().band_hz.lo == Approx(707.95).epsilon(1e-5));
  CHECK(bands.back().band_hz.hi == Approx(891.25).epsilon(1e-5));
}

TEST_CASE("third octaves are called by their nominal frequencies") {
  // IEC 61260-1, from memory. k counts from 1000 Hz.
  const std::pair<int, double> rows[] = {
      {-30, 1.0},  {-27, 2.0},   {-26, 2.5},  {-20, 10.0}, {-19, 12.5},   {-18, 16.0}, {-15, 31.5},  {-14, 40.0},
      {-13, 50.0}, {-10, 100.0}, {-8, 160.0}, {-5, 315.0}, {-2, 630.0},   {-1, 800.0}, {0, 1000.0},  {1, 1250.0},
      {3, 2000.0}, {5, 3150.0},  {9, 8000.0}, {10, 1e4},   {13, 20000.0}, {-31, 0.8},  {-35, 0.315}, {-40, 0.1}};
  for (const auto& [k, nominal] : rows) {
    CAPTURE(k);
    CHECK(spectral::nominal_third_octave_hz(k) == nominal);
    // A nominal frequency lies within 1.3 % of the exact one (8/7.943 and 1.25/1.2589 are as far as any).
    CHECK(nominal == Approx(1000.0 * std::pow(10.0, 0.1 * k)).epsilon(0.013));
  }
}

TEST_CASE("third octaves that the lines do not resolve are counted, not given") {
  // Lines 2 Hz apart under Hann: 3 Hz noise bandwidth, bands of at least 6 Hz, so from 31.5 Hz on (7.3 Hz wide; that of
  // 25 Hz is 5.8 Hz). Of 4 to 900 Hz the bands 5 to 25 Hz are counted: 8.
  const auto s = spectrum(tests::noise(40000, 43));
  const auto all = spectral::third_octaves(s, {4.0, 900.0});
  REQUIRE_FALSE(all.bands.empty());
  CHECK(*all.resolved_from_hz == 31.5);
  CHECK(all.bands.front().nominal_hz == 31.5);
  CHECK(all.bands.back().nominal_hz == 800.0);
  CHECK(all.unresolved == 8);
  CHECK(all.bands.size() == 15);
  const auto none = spectral::third_octaves(s, {4.0, 20.0});
  CHECK(none.bands.empty());
  CHECK_FALSE(none.resolved_from_hz);
  CHECK(none.unresolved == 6);
  CHECK(spectral::third_octaves(s, {0.0, 900.0}).bands.size() == 15);
  CHECK(spectral::third_octaves(s, {500.0, 400.0}).bands.empty());
}

TEST_CASE("a tone reads as r.m.s., peak and peak-to-peak, and noise as a density that no window changes") {
  std::vector<double> x(40000, 0.0);
  tests::add_tone(x, rate, 100.0, 3.0 / std::numbers::sqrt2);
  const auto s = spectrum(x);
  CHECK(s.amplitude_rms(50) * base::from_rms(base::Detector::rms) == Approx(3.0 / std::numbers::sqrt2));
  CHECK(s.amplitude_rms(50) * base::from_rms(base::Detector::peak) == Approx(3.0));
  CHECK(s.amplitude_rms(50) * base::from_rms(base::Detector::peak_to_peak) == Approx(6.0));
  // One-sided density of white noise of unit variance: 2 / rate; its mean over 400 lines is known to 0.5 %, limit four
  // of them.
  const auto white = tests::noise(200000, 44);
  for (const auto window : {spectral::Window::rectangle, spectral::Window::hann, spectral::Window::hamming,
                            spectral::Window::blackman_harris, spectral::Window::flat_top}) {
    const auto of_noise =
        spectral::averaged_spectrum(white, rate, Quantity::acceleration, {.window = window, .block_frames = 1000});
    double mean = 0.0;
    for (std::size_t k = 50; k < 450; ++k) mean += of_noise.density[k] / 400.0;
    CAPTURE(spectral::name(window));
    CHECK(mean * rate / 2.0 == Approx(1.0).epsilon(0.02));
  }
}
