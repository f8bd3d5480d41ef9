#include "stillmass/spectral/zoom.hpp"

#include <array>
#include <cmath>
#include <complex>
#include <limits>
#include <numbers>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/spectrum.hpp"

#include "spectral/base_band.hpp"
#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using base::Quantity;
using spectral::Window;
using spectral::ZoomSpectrum;

namespace {

constexpr double rate = 2000.0;

ZoomSpectrum zoomed(const std::vector<double>& x, const spectral::ZoomOptions& options, unsigned threads = 1,
                    std::size_t chunk = 1 << 20) {
  const tests::MemoryReader reader(rate, {{"a", x}}, {}, chunk);
  base::Context context;
  context.threads = threads;
  return spectral::zoom(reader, tests::all_frames(reader), options, context).front();
}

/// |sum of w x exp(-2 pi i f t)|^2 as a one-sided density, by the definition: a DFT at any frequency, of the samples
/// themselves, weighted by the continuous window over `block_s` from `start_s`.
double naive_density(const std::vector<double>& x, double f, Window window, double start_s, double block_s) {
  const auto grid = spectral::samples(window, 1 << 16);
  std::complex<double> sum;
  double norm = 0.0;
  for (std::size_t t = 0; t < x.size(); ++t) {
    const double place = (static_cast<double>(t) / rate - start_s) / block_s;
    if (place < 0.0 || place >= 1.0) continue;
    const double w = grid[static_cast<std::size_t>(place * static_cast<double>(grid.size()))];
    sum += std::polar(w * x[t], -2.0 * std::numbers::pi * f * static_cast<double>(t) / rate);
    norm += w * w;
  }
  return 2.0 * std::norm(sum) / (rate * norm);
}

}  // namespace

TEST_CASE("the lines of a zoom are those of a DFT of all samples") {
  // Two tones 0.25 Hz apart and noise; the truth is a DFT by its definition at each line.
  auto x = tests::noise(60000, 71);
  tests::add_tone(x, rate, 99.4, 1.0, 0.4);
  tests::add_tone(x, rate, 99.65, 0.5, 1.1);
  for (const Window window : {Window::hann, Window::blackman_harris}) {
    const auto z = zoomed(x, {.band_hz = {95.0, 105.0}, .window = window});
    CAPTURE(spectral::name(window));
    REQUIRE(z.blocks == 1);
    CHECK(z.line_hz < 0.035);
    CHECK(z.frequency(0) > 95.0 - 1e-9);
    CHECK(z.frequency(0) < 95.0 + z.line_hz);
    CHECK(z.frequency(z.density.size() - 1) < 105.0 + 1e-9);
    // The first decimated sample stands half a filter in; the band's design says where.
    double strongest = 0.0;
    for (const double v : z.density) strongest = std::max(strongest, v);
    const double transition = spectral::transition_for(10.0, 30.0);
    const auto band = spectral::base_band(rate, 100.0, 5.0 + 1.0 / 30.0, transition);
    const double start_s = static_cast<double>(band.half_length) / rate;
    for (std::size_t k = 0; k < z.density.size(); k += 3) {
      const double truth = naive_density(x, z.frequency(k), window, start_s, z.block_s);
      // Held to 0.05 % of itself and -90 dB of the strongest line.
      CAPTURE(z.frequency(k), truth);
      CHECK(std::abs(std::sqrt(z.density[k]) - std::sqrt(truth)) <
            5e-4 * std::sqrt(truth) + 3.2e-5 * std::sqrt(strongest));
    }
  }
}

TEST_CASE("the amplitude is flat over the band, to its ends") {
  for (int i = 0; i <= 20; ++i) {
    std::vector<double> x(40000, 0.0);
    const double f = 201.0 + 4.9 * i;  // a line of the band on each side
    tests::add_tone(x, rate, f, 1.0, 0.1 * i);
    const auto z = zoomed(x, {.band_hz = {200.0, 300.0}, .resolution_hz = 0.5, .window = Window::flat_top});
    double highest = 0.0;
    for (std::size_t k = 0; k < z.density.size(); ++k) highest = std::max(highest, z.amplitude_rms(k));
    CAPTURE(f);
    CHECK(highest == Approx(1.0).epsilon(1.2e-3));  // the flat-top itself loses up to 0.1 % between lines
  }
  // Without the window's own loss: tones on lines. Lines 0.5 Hz apart in a band where the decimated rate is 2000 / 13.
  std::vector<double> x(40000, 0.0);
  tests::add_tone(x, rate, 250.0, 1.0);
  const auto first = zoomed(x, {.band_hz = {200.0, 300.0}, .resolution_hz = 0.5});
  for (std::size_t k = 1; k < first.density.size(); k += first.density.size() / 9) {
    std::fill(x.begin(), x.end(), 0.0);
    tests::add_tone(x, rate, first.frequency(k), 1.0, 0.3);
    CHECK(zoomed(x, {.band_hz = {200.0, 300.0}, .resolution_hz = 0.5}).amplitude_rms(k) == Approx(1.0).epsilon(1e-4));
  }
}

TEST_CASE("what lies outside the band does not fold into it") {
  // A tone of amplitude 1 anywhere else; -90 dB of it is 3.2e-5. Blackman-Harris keeps its own side lobes 92 dB down.
  double highest = 0.0;
  for (double f = 3.7; f < 1000.0; f += 17.3) {
    if (f > 180.0 && f < 320.0) continue;  // nearer than the window's own lobes reach: not folding
    std::vector<double> x(40000, 0.0);
    tests::add_tone(x, rate, f, 1.0, f);
    const auto z = zoomed(x, {.band_hz = {200.0, 300.0}, .resolution_hz = 0.5, .window = Window::blackman_harris});
    for (std::size_t k = 0; k < z.density.size(); ++k) highest = std::max(highest, z.amplitude_rms(k));
  }
  CAPTURE(highest);
  CHECK(highest < 3.2e-5);
}

TEST_CASE("a zoom of the whole width is the averaged spectrum") {
  auto x = tests::noise(40000, 72);
  tests::add_tone(x, rate, 312.3, 1.0);
  const auto z = zoomed(x, {.band_hz = {0.0, 1000.0}, .resolution_hz = 1.0});
  const auto s = spectral::averaged_spectrum(x, rate, Quantity::acceleration, {.block_frames = 2000});
  REQUIRE(z.density.size() == s.density.size());
  CHECK(z.blocks == s.blocks);
  CHECK(z.effective_averages == Approx(s.effective_averages).epsilon(1e-12));
  CHECK(z.noise_bandwidth_hz == Approx(s.noise_bandwidth_hz).epsilon(1e-12));
  for (std::size_t k = 0; k < s.density.size(); k += 7) {
    CHECK(z.frequency(k) == Approx(s.frequency(k)));
    CHECK(z.density[k] == Approx(s.density[k]).epsilon(1e-9).margin(1e-15));
    CHECK(z.spread[k] == Approx(s.spread[k]).epsilon(1e-6));
  }
  CHECK(z.density.front() == Approx(s.density.front()).epsilon(1e-9));
  CHECK(z.density.back() == Approx(s.density.back()).epsilon(1e-9));
}

TEST_CASE("the mean over blocks of noise is its density, up to the ends of the band") {
  const auto z = zoomed(tests::noise(1200000, 73), {.band_hz = {400.0, 420.0}, .resolution_hz = 0.5});
  double mean = 0.0;
  for (const double v : z.density) mean += v / static_cast<double>(z.density.size());
  // White noise of variance 1 over 1000 Hz: 1e-3. 41 lines of about 560 effective averages: 0.7 % (k = 1).
  CHECK(mean == Approx(1e-3).epsilon(0.02));
  CHECK(std::accumulate(z.spread.begin(), z.spread.end(), 0.0) / static_cast<double>(z.spread.size()) ==
        Approx(1.0).epsilon(0.05));
}

TEST_CASE("a zoom is the same to the bit on any number of threads and for any chunks") {
  auto x = tests::noise(700000, 74);
  tests::add_tone(x, rate, 99.4, 1.0);
  const spectral::ZoomOptions options{.band_hz = {90.0, 110.0}, .resolution_hz = 0.05};
  const auto one = zoomed(x, options, 1);
  REQUIRE(one.blocks > 10);
  CHECK(zoomed(x, options, 3).density == one.density);
  CHECK(zoomed(x, options, 2, 777).density == one.density);
}

TEST_CASE("blocks of a zoom cross neither gaps nor missing samples") {
  auto x = tests::noise(60000, 75);
  tests::add_tone(x, rate, 100.0, 3.0);
  const std::vector<recording::Segment> cut{{0, 25000, 0.0}, {25000, 35000, 14.0}};
  const spectral::ZoomOptions options{.band_hz = {90.0, 110.0}, .resolution_hz = 0.2, .overlap = 0.0};
  const auto run = [&](const std::vector<double>& samples, const std::vector<recording::Segment>& segments) {
    const tests::MemoryReader reader(rate, {{"a", samples}}, segments);
    return spectral::zoom(reader, tests::all_frames(reader), options, {}).front();
  };
  // 5 s blocks of 10000 frames and the filter's ends: 2 in 25000 frames, 3 in 35000, 5 in 60000.
  CHECK(run(x, cut).blocks == 5);
  auto y = x;
  y[12000] = std::numeric_limits<double>::quiet_NaN();
  CHECK(run(y, cut).blocks == 4);
  // The first segment alone says the same as its part of the range.
  const tests::MemoryReader whole(rate, {{"a", x}});
  const tests::MemoryReader first(rate, {{"a", std::vector<double>(x.begin(), x.begin() + 25000)}});
  CHECK(spectral::zoom(whole, {0, 25000}, options, {}).front().density ==
        spectral::zoom(first, {0, 25000}, options, {}).front().density);
}

TEST_CASE("several zooms share one pass") {
  auto x = tests::noise(60000, 76);
  const tests::MemoryReader reader(rate, {{"a", x}, {"b", tests::noise(60000, 77)}});
  const auto all = tests::all_frames(reader);
  const spectral::ZoomOptions low{.band_hz = {10.0, 20.0}};
  const spectral::ZoomOptions high{.band_hz = {500.0, 520.0}, .resolution_hz = 0.1, .channels = {1}};
  spectral::ZoomConsumer a(reader.recording(), all, low), b(reader.recording(), all, high);
  const std::array<recording::Consumer*, 2> both{&a, &b};
  recording::run_pass(reader, all, both, {}, "zoom");
  CHECK(a.spectra().size() == 2);
  REQUIRE(b.spectra().size() == 1);
  CHECK(b.spectra().front().channel == "b");
  CHECK(a.spectra().front().density == spectral::zoom(reader, all, low, {}).front().density);
  CHECK(b.spectra().front().density == spectral::zoom(reader, all, high, {}).front().density);
}

TEST_CASE("points are bounded, and a zoom that cannot be had says what can") {
  const auto x = tests::noise(40000, 78);
  const auto z = zoomed(x, {.band_hz = {100.0, 200.0}, .most_points = 1000});
  CHECK(z.density.size() <= 1000);
  CHECK(z.blocks > 1);
  const auto says = [&](const spectral::ZoomOptions& options, const std::string& text) {
    CHECK_THROWS_WITH(zoomed(x, options), Catch::Matchers::Contains(text));
  };
  says({.band_hz = {100.0, 1001.0}}, "between 0 and 1000 Hz");
  says({.band_hz = {100.0, 100.0}}, "a zoom from 100 to 100 Hz");
  says({.band_hz = {100.0, 110.0}, .resolution_hz = 0.01}, "the finest are");
  says({.band_hz = {100.0, 110.0}, .resolution_hz = 20.0}, "up to 10 Hz apart");
  says({.band_hz = {100.0, 110.0}, .overlap = 0.99}, "0 to 0.95");
  says({.band_hz = {100.0, 110.0}, .channels = {3}}, "there is no channel 4");
}

TEST_CASE("a zoom as another quantity is divided by 2 pi f") {
  std::vector<double> x(40000, 0.0);
  tests::add_tone(x, rate, 100.0, 1.0);
  const auto a = zoomed(x, {.band_hz = {95.0, 105.0}, .window = Window::flat_top});
  const auto v = spectral::as_quantity(a, Quantity::velocity);
  for (std::size_t k = 0; k < a.density.size(); k += 5) {
    CHECK(v.amplitude_rms(k) * 2.0 * std::numbers::pi * a.frequency(k) == Approx(a.amplitude_rms(k)).epsilon(1e-12));
  }
  CHECK_THROWS_AS(spectral::as_quantity(a, Quantity::force), base::Error);
}
