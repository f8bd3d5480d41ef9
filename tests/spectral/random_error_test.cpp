#include "stillmass/spectral/random_error.hpp"

#include <cmath>
#include <complex>
#include <cstdint>
#include <vector>

#include "stillmass/spectral/frequency_response.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"
#include "support/memory_reader.hpp"

using namespace stillmass;
using spectral::HitBlock;
using tests::MemoryReader;

namespace {

constexpr double rate = 1024.0;

}  // namespace

TEST_CASE("the error formulas give the printed figures") {
  // CHECKS E1 to E4, Bendat & Piersol, nd = 100, coherence 0.9; E2 within 3 % (n - 1 for n makes 0.5 % of it).
  CHECK(spectral::density_error(100.0) == Approx(0.100));
  CHECK(spectral::response_error(0.9, 100.0) == Approx(0.02357).epsilon(0.03));
  CHECK(spectral::coherence_error(0.9, 100.0) == Approx(0.01491).epsilon(1e-3));
  CHECK(spectral::coherence_bias(0.8, 32.0) == Approx(0.00125).epsilon(1e-3));
  CHECK(std::isinf(spectral::response_error(0.0, 100.0)));
  CHECK(std::isinf(spectral::response_error(0.9, 1.0)));
}

TEST_CASE("the scatter of averaged densities is what the effective averages say") {
  // 400 noises of 32 half-overlapped Hann blocks: the relative variance of a line times the effective averages is 1.
  // Standard error of the figure over 400 x 25 independent lines: 1.5 %; limit 4 of them. Source: CHECKS W15, E1.
  constexpr int cases = 400;
  constexpr std::size_t n = 128;
  std::vector<double> sum(n / 2 + 1, 0.0), squares(n / 2 + 1, 0.0);
  double effective = 0.0;
  double spread = 0.0;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const auto s = spectral::averaged_spectrum(tests::noise(n * 33 / 2, 21, c), rate, base::Quantity::acceleration,
                                               {.block_frames = n});
    effective = s.effective_averages;
    for (std::size_t k = 0; k < sum.size(); ++k) {
      sum[k] += s.density[k];
      squares[k] += s.density[k] * s.density[k];
    }
    spread += s.spread[20] / cases;
  }
  double relative_variance = 0.0;
  int lines = 0;
  for (std::size_t k = 2; k + 2 < sum.size(); ++k, ++lines) {
    const double mean = sum[k] / cases;
    relative_variance += (squares[k] / cases - mean * mean) / (mean * mean);
  }
  CHECK(relative_variance / lines * effective == Approx(1.0).epsilon(0.06));
  CHECK(spread == Approx(1.0).epsilon(0.06));
}

TEST_CASE("response and coherence scatter as the error formulas say") {
  // y = x + noise of variance 1/4: coherence 0.8. 300 cases of 32 separate blocks, 30 lines used: about 9000 values, so
  // the scatter of a scatter is 0.75 %; limits 4 %, for the coherence (skewed) 6 %. CHECKS E2, E3: simulated .0635,
  // .0565.
  constexpr std::size_t n = 64;
  double magnitude = 0.0, phase = 0.0, coherence = 0.0, coherence_squares = 0.0, claimed = 0.0;
  int count = 0;
  for (std::uint64_t c = 0; c < 300; ++c) {
    const auto x = tests::noise(n * 32, 33, 2 * c);
    auto y = tests::noise(n * 32, 33, 2 * c + 1);
    for (std::size_t i = 0; i < y.size(); ++i) y[i] = x[i] + 0.5 * y[i];
    const MemoryReader reader(rate, {{"x", x}, {"y", y}});
    const auto h = spectral::frequency_responses(
        reader, all_frames(reader), {0, {1}},
        {.window = spectral::Window::rectangle, .overlap = 0.0, .block_frames = n}, {})[0];
    REQUIRE(h.averages == Approx(32.0));
    for (std::size_t k = 1; k < 31; ++k, ++count) {
      magnitude += (std::abs(h.h1[k]) - 1.0) * (std::abs(h.h1[k]) - 1.0);
      phase += std::arg(h.h1[k]) * std::arg(h.h1[k]);
      coherence += h.coherence[k];
      coherence_squares += h.coherence[k] * h.coherence[k];
      claimed += h.random_error[k] * h.random_error[k];
    }
  }
  const double expected = spectral::response_error(0.8, 32.0);
  CHECK(std::sqrt(magnitude / count) == Approx(expected).epsilon(0.04));
  CHECK(std::sqrt(phase / count) == Approx(expected).epsilon(0.04));
  CHECK(std::sqrt(claimed / count) == Approx(expected).epsilon(0.06));
  const double mean = coherence / count;
  CHECK(std::sqrt(coherence_squares / count - mean * mean) / mean ==
        Approx(spectral::coherence_error(0.8, 32.0)).epsilon(0.06));
}

TEST_CASE("channels that have nothing in common show the coherence that the bias formula says") {
  // CHECKS E4 with coherence 0: 1/n. 9000 values of standard deviation 1/32: known to 1 %, limit 5 %.
  constexpr std::size_t n = 64;
  double coherence = 0.0;
  for (std::uint64_t c = 0; c < 300; ++c) {
    const MemoryReader reader(rate,
                              {{"x", tests::noise(n * 32, 37, 2 * c)}, {"y", tests::noise(n * 32, 37, 2 * c + 1)}});
    const auto h = spectral::frequency_responses(
        reader, all_frames(reader), {0, {1}},
        {.window = spectral::Window::rectangle, .overlap = 0.0, .block_frames = n}, {})[0];
    for (std::size_t k = 1; k < 31; ++k) coherence += h.coherence[k] / 9000.0;
  }
  CHECK(coherence == Approx(spectral::coherence_bias(0.0, 32.0)).epsilon(0.05));
}

TEST_CASE("with three blows the error is that of two free ones") {
  // The random error of a mean over few blocks: simulated against claimed, coherence near 0.99. 3000 cases, 10 lines.
  constexpr std::size_t n = 32;
  double scatter = 0.0, claimed = 0.0;
  int count = 0;
  for (std::uint64_t c = 0; c < 3000; ++c) {
    std::vector<std::vector<double>> x, y;
    std::vector<HitBlock> hits;
    for (std::uint64_t hit = 0; hit < 3; ++hit) {
      x.push_back(std::vector<double>(n, 0.0));
      x.back()[4] = 1.0;
      y.push_back(tests::noise(n, 34, 3 * c + hit));
      for (double& v : y.back()) v *= 0.02;
      y.back()[4] += 1.0;
    }
    for (std::size_t hit = 0; hit < 3; ++hit) hits.push_back({x[hit], y[hit]});
    const auto h = spectral::hit_response(hits, rate, base::Quantity::acceleration, {});
    for (std::size_t k = 3; k < 13; ++k, ++count) {
      scatter += (std::abs(h.h1[k]) - 1.0) * (std::abs(h.h1[k]) - 1.0);
      claimed += h.random_error[k] * h.random_error[k];
    }
  }
  // The force is the same each time, so var |H| = noise / (2 n); the n - 1 makes the claim of an estimated coherence
  // right.
  CHECK(std::sqrt(claimed / count) == Approx(std::sqrt(scatter / count)).epsilon(0.04));
}
