#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/spectrum.hpp"

#include "oracle/naive_dft.hpp"
#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::Averaging;
using spectral::BlockRun;
using spectral::Spectrum;
using spectral::SpectrumOptions;
using spectral::Window;
using tests::MemoryReader;

namespace {

constexpr double rate = 1000.0;

Spectrum only(const std::vector<double>& x, const SpectrumOptions& options) {
  return spectral::averaged_spectrum(x, rate, base::Quantity::acceleration, options);
}

/// Sum of weights and weighted sum of the densities by the plain recursion, block after block, with a naive transform.
struct Plain {
  std::vector<double> mean, spread;
};
Plain exponential(const std::vector<double>& x, std::size_t n, std::size_t hop, double averages, Window window) {
  const auto w = spectral::samples(window, n);
  std::vector<double> sum(n / 2 + 1, 0.0), square(n / 2 + 1, 0.0);
  double weights = 0.0, weights_squared = 0.0;
  const double q = 1.0 - 1.0 / averages;
  for (std::size_t at = 0; at + n <= x.size(); at += hop) {
    const auto density = tests::naive_density(std::span(x).subspan(at, n), w, rate);
    weights = q * weights + 1.0;
    weights_squared = q * q * weights_squared + 1.0;
    for (std::size_t k = 0; k < sum.size(); ++k) {
      sum[k] = q * sum[k] + density[k];
      square[k] = q * square[k] + density[k] * density[k];
    }
  }
  Plain plain;
  for (std::size_t k = 0; k < sum.size(); ++k) {
    const double mean = sum[k] / weights;
    plain.mean.push_back(mean);
    const double variance = (square[k] / weights - mean * mean) / (1.0 - weights_squared / (weights * weights));
    plain.spread.push_back(std::sqrt(std::max(variance, 0.0)) / mean);
  }
  return plain;
}

}  // namespace

TEST_CASE("an exponential average is the plain recursion over the blocks, newest heaviest") {
  const auto x = tests::noise(3000, 81);
  for (const double averages : {1.0, 2.5, 8.0, 100.0}) {
    for (const double overlap : {0.0, 0.5, 0.75}) {
      const std::size_t n = 96;
      const auto s = only(x, {.overlap = overlap,
                              .averaging = Averaging::exponential,
                              .exponential_averages = averages,
                              .block_frames = n});
      const auto hop = static_cast<std::size_t>((1.0 - overlap) * static_cast<double>(n));
      const auto plain = exponential(x, n, hop, averages, Window::hann);
      CAPTURE(averages, overlap);
      for (std::size_t k = 0; k < plain.mean.size(); ++k) {
        CHECK(s.density[k] == Approx(plain.mean[k]).epsilon(1e-10));
        if (averages > 1.0) CHECK(s.spread[k] == Approx(plain.spread[k]).epsilon(1e-9));
      }
      if (averages == 1.0) CHECK(s.spread.empty());  // the newest block alone
    }
  }
}

TEST_CASE("the weights of an exponential average sum to 1 from the first block on") {
  // Of a steady tone every block shows the same, so the average does, however few blocks there are.
  std::vector<double> x(700, 0.0);
  tests::add_tone(x, rate, 100.0, 1.0);
  const auto s = only(x, {.averaging = Averaging::exponential, .exponential_averages = 50.0, .block_frames = 100});
  CHECK(s.amplitude_rms(10) == Approx(1.0).epsilon(1e-12));
}

TEST_CASE("a change dies out of an exponential average by 1 - 1/n a block") {
  // 20 blocks of amplitude 2, then 12 of 1, without overlap: power 1 + 3 (q^12 - q^32) / (1 - q^32).
  const std::size_t n = 100;
  std::vector<double> x(32 * n, 0.0);
  tests::add_tone(x, rate, 100.0, 1.0);
  for (std::size_t i = 0; i < 20 * n; ++i) x[i] *= 2.0;
  const auto s = only(x, {.window = Window::rectangle,
                          .overlap = 0.0,
                          .averaging = Averaging::exponential,
                          .exponential_averages = 8.0,
                          .block_frames = n});
  const double q = 7.0 / 8.0;
  const double expected = 1.0 + 3.0 * (std::pow(q, 12) - std::pow(q, 32)) / (1.0 - std::pow(q, 32));
  CHECK(std::pow(s.amplitude_rms(10), 2) == Approx(expected).epsilon(1e-12));
}

TEST_CASE("the parts of a pass merge to the exponential average of the whole, whatever the threads") {
  const auto frames = static_cast<std::size_t>(recording::pass_range_frames) * 2 + 7000;
  auto x = tests::noise(frames, 82);
  x[300000] = std::numeric_limits<double>::quiet_NaN();
  const MemoryReader reader(rate, {{"x", x}});
  // Long memory, so that the parts before weigh: 400 blocks against 175 in a range.
  const SpectrumOptions options{
      .averaging = Averaging::exponential, .exponential_averages = 400.0, .block_frames = 3000};
  base::Context three;
  three.threads = 3;
  const auto one = spectral::averaged_spectra(reader, all_frames(reader), options, {})[0];
  const auto many = spectral::averaged_spectra(reader, all_frames(reader), options, three)[0];
  CHECK(one.density == many.density);
  CHECK(one.spread == many.spread);
  // The same as one consumer that sees it all, by hand.
  spectral::SpectrumConsumer whole(reader.recording(), all_frames(reader), options);
  const auto single = whole.fresh(all_frames(reader));
  recording::Chunk chunk;
  auto handle = reader.second();
  while (handle->next(chunk, 5000)) single->take(chunk);
  whole.merge(*single);
  const auto expected = whole.spectra()[0];
  CHECK(one.blocks == expected.blocks);
  CHECK(one.effective_averages == Approx(expected.effective_averages).epsilon(1e-12));
  for (std::size_t k = 0; k < one.density.size(); ++k) {
    CHECK(one.density[k] == Approx(expected.density[k]).epsilon(1e-12));
    CHECK(one.spread[k] == Approx(expected.spread[k]).epsilon(1e-9));
  }
}

TEST_CASE("weighted blocks are worth what Welch's sum with weights says") {
  // Naive double sum over all pairs of blocks.
  const std::size_t length = 512;
  const auto w = spectral::samples(Window::hann, length);
  const std::vector<BlockRun> runs{{0, 128, 30}, {4500, 1, 1}, {4600, 200, 12}};
  std::vector<std::int64_t> starts;
  for (const BlockRun& run : runs) {
    for (std::int64_t i = 0; i < run.count; ++i) starts.push_back(run.start(i));
  }
  for (const double decay : {0.0, 0.5, 0.9, 0.99, 1.0}) {
    double weights = 0.0, squares = 0.0, plain_squares = 0.0;
    for (std::size_t i = 0; i < starts.size(); ++i) {
      const double wi = std::pow(decay, static_cast<double>(starts.size() - 1 - i));
      weights += wi;
      plain_squares += wi * wi;
      for (std::size_t j = 0; j < starts.size(); ++j) {
        const double wj = std::pow(decay, static_cast<double>(starts.size() - 1 - j));
        const auto lag = static_cast<std::size_t>(std::abs(starts[i] - starts[j]));
        squares += wi * wj * std::pow(spectral::overlap_correlation(w, lag), 2);
      }
    }
    const auto found = spectral::averages(Window::hann, length, runs, decay);
    CAPTURE(decay);
    CHECK(found.effective == Approx(weights * weights / squares).epsilon(1e-9));
    // The pairs say it again: K + 2 sum of pairs r^2 is K^2 over the effective averages.
    const auto blocks = static_cast<double>(found.blocks);
    double sum = blocks;
    for (const auto& overlap : found.overlaps) {
      const auto lag = static_cast<std::size_t>(std::lround(overlap.lag * length));
      sum += 2.0 * overlap.pairs * std::pow(spectral::overlap_correlation(w, lag), 2);
    }
    CHECK(blocks * blocks / sum == Approx(found.effective).epsilon(1e-9));
  }
  // In the long run, without overlap: 2 n - 1.
  const BlockRun apart{0, 512, 5000};
  CHECK(spectral::averages(Window::hann, length, {&apart, 1}, 1.0 - 1.0 / 16.0).effective ==
        Approx(31.0).epsilon(1e-9));
}

TEST_CASE("the scatter of exponential averages is what their effective averages say") {
  // 400 noises, 60 lines: relative variance times effective averages is 1; known to about 2 %, limit 8 %.
  constexpr int cases = 400;
  constexpr std::size_t n = 128;
  std::vector<double> sum(n / 2 + 1, 0.0), squares(n / 2 + 1, 0.0);
  double effective = 0.0;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const auto s =
        only(tests::noise(n * 24, 83, c),
             {.overlap = 0.75, .averaging = Averaging::exponential, .exponential_averages = 12.0, .block_frames = n});
    effective = s.effective_averages;
    for (std::size_t k = 0; k < sum.size(); ++k) {
      sum[k] += s.density[k];
      squares[k] += s.density[k] * s.density[k];
    }
  }
  double relative = 0.0;
  int lines = 0;
  for (std::size_t k = 2; k + 2 < sum.size(); ++k, ++lines) {
    const double mean = sum[k] / cases;
    relative += (squares[k] / cases - mean * mean) / (mean * mean);
  }
  CHECK(relative / lines * effective == Approx(1.0).epsilon(0.08));
}

TEST_CASE("an exponential average over less than one block is refused, and kinds have names") {
  const std::vector<double> x(1000, 1.0);
  for (const double averages : {0.5, 0.0, std::numeric_limits<double>::quiet_NaN()}) {
    CHECK_THROWS_AS(
        only(x, {.averaging = Averaging::exponential, .exponential_averages = averages, .block_frames = 100}),
        base::Error);
  }
  for (const Averaging kind : {Averaging::mean, Averaging::peak_hold, Averaging::exponential}) {
    CHECK(spectral::averaging_named(spectral::name(kind)) == kind);
  }
  CHECK_FALSE(spectral::averaging_named("median"));
}
