#include "stillmass/spectral/spectrum.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/cross_spectrum.hpp"

#include "oracle/naive_dft.hpp"
#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::Averaging;
using spectral::Spectrum;
using spectral::SpectrumOptions;
using spectral::Window;
using tests::MemoryReader;

namespace {

constexpr double missing = std::numeric_limits<double>::quiet_NaN();
constexpr double rate = 1000.0;

Spectrum only(const std::vector<double>& x, const SpectrumOptions& options) {
  return spectral::averaged_spectrum(x, rate, base::Quantity::acceleration, options);
}

/// Mean of the blocks that start at those frames, by the definition.
std::vector<double> naive_mean(const std::vector<double>& x, const std::vector<std::size_t>& starts, std::size_t n,
                               Window window) {
  const auto w = spectral::samples(window, n);
  std::vector<double> mean(n / 2 + 1, 0.0);
  for (const std::size_t start : starts) {
    const auto density = tests::naive_density(std::span(x).subspan(start, n), w, rate);
    for (std::size_t k = 0; k < mean.size(); ++k) mean[k] += density[k] / static_cast<double>(starts.size());
  }
  return mean;
}

void check_equal(const std::vector<double>& a, const std::vector<double>& b, double relative) {
  REQUIRE(a.size() == b.size());
  const double greatest = *std::max_element(b.begin(), b.end());
  for (std::size_t k = 0; k < a.size(); ++k) CHECK(std::abs(a[k] - b[k]) <= relative * greatest);
}

double total(const Spectrum& s) { return std::accumulate(s.density.begin(), s.density.end(), 0.0) * s.line_hz; }

}  // namespace

TEST_CASE("an averaged spectrum is the mean of the naive transforms of its blocks") {
  const auto x = tests::noise(200, 1);
  for (const std::size_t n : {40, 45}) {
    for (const Window window : {Window::rectangle, Window::hann, Window::flat_top}) {
      std::vector<std::size_t> starts;
      for (std::size_t at = 0; at + n <= x.size(); at += n - n / 2) starts.push_back(at);
      const auto s = only(x, {.window = window, .block_frames = n});
      CHECK(s.blocks == starts.size());
      check_equal(s.density, naive_mean(x, starts, n, window), 1e-13);  // rounding of a transform of 45 points
    }
  }
}

TEST_CASE("the density of one unweighted block adds up to its mean square (Parseval)") {
  for (const std::size_t n : {1000, 1001}) {
    const auto x = tests::noise(n, 2);
    const auto s = only(x, {.window = Window::rectangle, .block_frames = n});
    const double mean_square = std::inner_product(x.begin(), x.end(), x.begin(), 0.0) / static_cast<double>(n);
    CHECK(total(s) == Approx(mean_square).epsilon(1e-12));
    CHECK(s.blocks == 1);
    CHECK(s.spread.empty());
  }
}

TEST_CASE("a tone on a line shows its r.m.s. amplitude with every window") {
  std::vector<double> x(10000, 0.0);
  tests::add_tone(x, rate, 60.0, 0.7, 1.0);
  for (const Window window :
       {Window::rectangle, Window::hann, Window::hamming, Window::blackman_harris, Window::flat_top}) {
    const auto s = only(x, {.window = window, .block_frames = 500});
    CAPTURE(spectral::name(window));
    CHECK(s.line_hz == Approx(2.0));
    CHECK(s.amplitude_rms(30) == Approx(0.7).epsilon(1e-12));
    CHECK(s.spread[30] < 1e-6);
  }
}

TEST_CASE("twice the signal has four times the density, and a later start of a tone changes nothing") {
  const auto x = tests::noise(4000, 3);
  auto doubled = x;
  for (double& v : doubled) v *= 2.0;
  const auto a = only(x, {.block_frames = 256});
  const auto b = only(doubled, {.block_frames = 256});
  for (std::size_t k = 0; k < a.density.size(); ++k) CHECK(b.density[k] == Approx(4.0 * a.density[k]).epsilon(1e-14));

  std::vector<double> early(4096, 0.0), late(4096, 0.0);
  tests::add_tone(early, rate, 125.0, 1.0, 0.0);
  tests::add_tone(late, rate, 125.0, 1.0, 2.0);
  check_equal(only(early, {.block_frames = 256}).density, only(late, {.block_frames = 256}).density, 1e-12);
}

TEST_CASE("peak hold keeps the greatest block of each line") {
  std::vector<double> x(4000, 0.0);
  tests::add_tone(x, rate, 100.0, 1.0);
  for (std::size_t i = 0; i < 2000; ++i) x[i] *= 0.5;
  const auto held = only(x, {.averaging = Averaging::peak_hold, .block_frames = 500});
  const auto mean = only(x, {.block_frames = 500});
  CHECK(held.amplitude_rms(50) == Approx(1.0).epsilon(1e-10));
  CHECK(mean.amplitude_rms(50) < 0.9);
  CHECK(held.spread.empty());
}

TEST_CASE("blocks never cross a gap") {
  // Two tones of one amplitude, the second in opposite phase: a block over the gap would lose amplitude.
  std::vector<double> x(1300, 0.0);
  tests::add_tone(x, rate, 100.0, 1.0);
  for (std::size_t i = 630; i < x.size(); ++i) x[i] = -x[i];
  const MemoryReader reader(rate, {{"a", x}}, {{0, 630, 0.0}, {630, 670, 5.0}}, 77);
  const auto s = spectral::averaged_spectra(reader, all_frames(reader), {.block_frames = 100}, {});
  CHECK(s[0].blocks == 11 + 12);
  CHECK(s[0].amplitude_rms(10) == Approx(1.0).epsilon(1e-12));
  CHECK(s[0].spread[10] < 1e-6);
}

TEST_CASE("a missing sample costs its channel the blocks that hold it and no other channel anything") {
  auto x = tests::noise(1000, 4);
  const auto y = x;
  x[333] = missing;
  x[334] = missing;
  for (const std::size_t chunk : {13, 100, 1000}) {
    const MemoryReader reader(rate, {{"x", x}, {"y", y}}, {}, chunk);
    const auto s = spectral::averaged_spectra(reader, all_frames(reader), {.overlap = 0.5, .block_frames = 100}, {});
    std::vector<std::size_t> whole, without;
    for (std::size_t at = 0; at + 100 <= 1000; at += 50) {
      whole.push_back(at);
      if (at + 100 <= 333 || at > 334) without.push_back(at);
    }
    CHECK(s[0].blocks == without.size());
    check_equal(s[0].density, naive_mean(x, without, 100, Window::hann), 1e-13);
    check_equal(s[1].density, naive_mean(y, whole, 100, Window::hann), 1e-13);
  }
}

TEST_CASE("a channel without a valid block has no lines") {
  std::vector<double> x(1000, 1.0);
  for (std::size_t i = 0; i < x.size(); i += 40) x[i] = missing;
  const MemoryReader reader(rate, {{"x", x}});
  const auto s = spectral::averaged_spectra(reader, all_frames(reader), {.block_frames = 100}, {});
  CHECK(s[0].blocks == 0);
  CHECK(s[0].density.empty());
}

TEST_CASE("the length of the chunks changes no bit") {
  const auto x = tests::noise(5000, 5);
  const MemoryReader whole(rate, {{"x", x}});
  const auto expected = spectral::averaged_spectra(whole, all_frames(whole), {.overlap = 0.7, .block_frames = 90}, {});
  for (const std::size_t chunk : {1, 7, 89, 90, 91, 640}) {
    const MemoryReader reader(rate, {{"x", x}}, {}, chunk);
    const auto s = spectral::averaged_spectra(reader, all_frames(reader), {.overlap = 0.7, .block_frames = 90}, {});
    CHECK(s[0].density == expected[0].density);
    CHECK(s[0].spread == expected[0].spread);
  }
}

TEST_CASE("one and three threads give the same bits over several ranges of a pass") {
  const auto frames = static_cast<std::size_t>(recording::pass_range_frames) * 3 + 5000;
  auto x = tests::noise(frames, 6);
  const auto y = tests::noise(frames, 6, 1);
  x[400000] = missing;
  const MemoryReader reader(51200.0, {{"x", x}, {"y", y}});
  const SpectrumOptions options{.overlap = 0.75, .block_frames = 3000};
  base::Context one, three;
  three.threads = 3;
  const auto a = spectral::averaged_spectra(reader, all_frames(reader), options, one);
  const auto b = spectral::averaged_spectra(reader, all_frames(reader), options, three);
  const auto c = spectral::cross_spectra(reader, all_frames(reader), {0, {1}}, options, one);
  const auto d = spectral::cross_spectra(reader, all_frames(reader), {0, {1}}, options, three);
  for (std::size_t i = 0; i < 2; ++i) {
    CHECK(a[i].density == b[i].density);
    CHECK(a[i].spread == b[i].spread);
    CHECK(a[i].effective_averages == b[i].effective_averages);
  }
  CHECK(a[1].blocks == 1 + (frames - 3000) / 750);
  CHECK(a[0].blocks == a[1].blocks - 4);  // the one missing sample lies in 3000/750 blocks
  CHECK(c[0].cross == d[0].cross);
  CHECK(c[0].blocks == a[0].blocks);
}

TEST_CASE("channels in another order give the same spectra in that order") {
  const auto x = tests::noise(3000, 7), y = tests::noise(3000, 8), z = tests::noise(3000, 9);
  const MemoryReader forth(rate, {{"x", x}, {"y", y}, {"z", z}});
  const MemoryReader back(rate, {{"z", z}, {"x", x}, {"y", y}});
  const auto a = spectral::averaged_spectra(forth, all_frames(forth), {.block_frames = 128}, {});
  const auto b = spectral::averaged_spectra(back, all_frames(back), {.block_frames = 128}, {});
  CHECK(a[0].density == b[1].density);
  CHECK(a[1].density == b[2].density);
  CHECK(a[2].density == b[0].density);
  CHECK(b[0].channel == "z");
}

TEST_CASE("only the frames of the range count") {
  auto x = tests::noise(3000, 10);
  const MemoryReader reader(rate, {{"x", x}}, {}, 211);
  const auto part = spectral::averaged_spectra(reader, {700, 1900}, {.block_frames = 128}, {});
  const std::vector<double> cut(x.begin() + 700, x.begin() + 1900);
  check_equal(part[0].density, only(cut, {.block_frames = 128}).density, 1e-14);
}

TEST_CASE("consumers of different block lengths share one pass") {
  const auto x = tests::noise(20000, 12);
  const MemoryReader reader(rate, {{"x", x}}, {}, 333);
  spectral::SpectrumConsumer coarse(reader.recording(), all_frames(reader), {.block_frames = 64});
  spectral::SpectrumConsumer fine(reader.recording(), all_frames(reader), {.block_frames = 1000});
  const std::array<recording::Consumer*, 2> both{&coarse, &fine};
  recording::run_pass(reader, all_frames(reader), both, {}, "spectra");
  check_equal(coarse.spectra()[0].density, only(x, {.block_frames = 64}).density, 1e-14);
  check_equal(fine.spectra()[0].density, only(x, {.block_frames = 1000}).density, 1e-14);
}

TEST_CASE("triggered blocks are averaged where they start") {
  const auto x = tests::noise(1000, 13);
  const MemoryReader reader(rate, {{"x", x}}, {}, 150);
  const std::vector<std::int64_t> starts{10, 60, 75, 400, 900};
  spectral::SpectrumConsumer consumer(
      reader.recording(), spectral::BlockPlan::triggered(reader.recording(), all_frames(reader), starts, 80),
      Window::rectangle);
  const std::array<recording::Consumer*, 1> one{&consumer};
  recording::run_pass(reader, all_frames(reader), one, {}, "spectra");
  const auto s = consumer.spectra().front();
  check_equal(s.density, naive_mean(x, {10, 60, 75, 400, 900}, 80, Window::rectangle), 1e-13);
  // 10 and 60 share 30 of 80 frames, 60 and 75 65, 10 and 75 15.
  const double pairs = 0.375 * 0.375 + 0.8125 * 0.8125 + 0.1875 * 0.1875;
  CHECK(s.effective_averages == Approx(25.0 / (5.0 + 2.0 * pairs)).epsilon(1e-12));
}

TEST_CASE("faulty options are refused before any sample is read") {
  const MemoryReader reader(rate, {{"x", std::vector<double>(100, 0.0)}});
  CHECK_THROWS_AS(spectral::averaged_spectra(reader, all_frames(reader), {.overlap = 1.0}, {}), base::Error);
  CHECK_THROWS_AS(spectral::averaged_spectra(reader, all_frames(reader), {.block_frames = 101}, {}), base::Error);
  CHECK_THROWS_AS(spectral::averaged_spectra(reader, all_frames(reader), {.resolution_hz = missing}, {}), base::Error);
  CHECK_THROWS_AS(spectral::cross_spectra(reader, all_frames(reader), {0, {1}}, {}, {}), base::Error);
  CHECK_THROWS_AS(
      spectral::cross_spectra(reader, all_frames(reader), {0, {0}}, {.averaging = Averaging::peak_hold}, {}),
      base::Error);
}
