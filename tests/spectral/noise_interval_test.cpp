#include "stillmass/spectral/noise_interval.hpp"

#include <cmath>
#include <cstdint>
#include <vector>

#include "stillmass/numeric/distribution.hpp"

#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using spectral::Averaging;
using spectral::Spectrum;
using spectral::Window;

namespace {

constexpr double rate = 1024.0;
constexpr std::size_t n = 128;

Spectrum of_noise(std::uint64_t case_number, double overlap, Window window, std::size_t length = n) {
  return spectral::averaged_spectrum(tests::noise(12 * length, 91, case_number), rate, base::Quantity::acceleration,
                                     {.window = window, .overlap = overlap, .block_frames = length});
}

}  // namespace

TEST_CASE("95 % intervals of lines hold the true density 95 % of the time, at 0, 50 and 75 % overlap") {
  // White noise of unit variance: density 2 / rate, half of it at 0 and rate/2. 1000 cases; the inner lines: 30 that
  // hardly correlate, so the share is known to 0.13 %, limit 1 %; each end alone to 0.7 %, limit 2.5 %.
  for (const double overlap : {0.0, 0.5, 0.75}) {
    int inside = 0, inner = 0, at_zero = 0, at_top = 0, beside_zero = 0;
    constexpr int cases = 1000;
    for (std::uint64_t c = 0; c < cases; ++c) {
      const auto s = of_noise(c, overlap, Window::hann);
      const auto holds = [&](std::size_t k, double density) {
        return spectral::density_interval(s, k)->contains(density) ? 1 : 0;
      };
      for (std::size_t k = 3; k < n / 2 - 2; k += 2, ++inner) inside += holds(k, 2.0 / rate);
      at_zero += holds(0, 1.0 / rate);
      beside_zero += holds(1, 2.0 / rate);
      at_top += holds(n / 2, 1.0 / rate);
    }
    CAPTURE(overlap);
    CHECK(std::abs(static_cast<double>(inside) / inner - 0.95) < 0.01);
    CHECK(std::abs(static_cast<double>(at_zero) / cases - 0.95) < 0.025);
    CHECK(std::abs(static_cast<double>(beside_zero) / cases - 0.95) < 0.025);
    CHECK(std::abs(static_cast<double>(at_top) / cases - 0.95) < 0.025);
  }
}

TEST_CASE("intervals of an exponential average and of odd blocks hold as often") {
  int inside = 0, inner = 0, last = 0;
  constexpr int cases = 600;
  for (std::uint64_t c = 0; c < cases; ++c) {
    const auto s = spectral::averaged_spectrum(
        tests::noise(40 * n, 92, c), rate, base::Quantity::acceleration,
        {.averaging = Averaging::exponential, .exponential_averages = 8.0, .block_frames = n});
    for (std::size_t k = 3; k < n / 2 - 2; k += 4, ++inner) {
      inside += spectral::density_interval(s, k)->contains(2.0 / rate) ? 1 : 0;
    }
    const auto odd = of_noise(c, 0.5, Window::hann, 127);
    last += spectral::density_interval(odd, 63)->contains(2.0 / rate) ? 1 : 0;
  }
  CHECK(std::abs(static_cast<double>(inside) / inner - 0.95) < 0.012);
  CHECK(std::abs(static_cast<double>(last) / cases - 0.95) < 0.03);
}

TEST_CASE("the interval is nu G over the quantiles of chi-square") {
  // Chi-square of 20 degrees of freedom: 9.591 and 34.170 at 2.5 and 97.5 % (table, from memory).
  Spectrum s;
  s.rate_hz = 100.0;
  s.line_hz = 1.0;
  s.density.assign(51, 3.0);
  s.blocks = 10;
  s.effective_averages = 10.0;
  s.window = Window::rectangle;
  s.noise_bandwidth_hz = 1.0;
  CHECK(spectral::degrees_of_freedom(s, 20) == 20.0);
  CHECK(spectral::degrees_of_freedom(s, 0) == 10.0);
  CHECK(spectral::degrees_of_freedom(s, 50) == 10.0);
  const auto density = *spectral::density_interval(s, 20);
  CHECK(density.lo == Approx(3.0 * 20.0 / 34.170).epsilon(1e-4));
  CHECK(density.hi == Approx(3.0 * 20.0 / 9.591).epsilon(1e-4));
  const auto amplitude = *spectral::amplitude_interval(s, 20);
  CHECK(amplitude.lo == Approx(std::sqrt(density.lo)));
  CHECK(amplitude.hi == Approx(std::sqrt(density.hi)));
  // Hann lines beside 0 correlate with their mirror image by 1/6 (w^2 = 3/8 + 1/2 cos + 1/8 cos 2).
  s.window = Window::hann;
  CHECK(spectral::degrees_of_freedom(s, 1) == Approx(20.0 / (1.0 + 1.0 / 36.0)));
  CHECK(spectral::degrees_of_freedom(s, 49) == Approx(20.0 / (1.0 + 1.0 / 36.0)));
  s.rate_hz = 101.0;  // odd blocks: the last line is half a line from rate/2, its image one line away: 2/3
  CHECK(spectral::degrees_of_freedom(s, 50) == Approx(20.0 / (1.0 + 4.0 / 9.0)));
}

TEST_CASE("peak hold has no interval, nor has a line that is not given, and it is said why") {
  auto s = of_noise(1, 0.5, Window::hann);
  CHECK(spectral::density_interval(s, 1000).refusal().code == "line-not-given");
  s.first_line = 5;
  CHECK(spectral::density_interval(s, 4).refusal().code == "line-not-given");
  s.averaging = Averaging::peak_hold;
  CHECK(spectral::density_interval(s, 10).refusal().code == "peak-hold");
  CHECK(spectral::amplitude_interval(s, 10).refusal().code == "peak-hold");
  CHECK(spectral::density_interval(Spectrum{}, 0).refusal().code == "no-blocks");
}

TEST_CASE("the intervals of all lines are those of each") {
  for (const std::size_t length : {64u, 63u}) {
    spectral::SpectrumOptions options;
    options.block_frames = length;
    const auto s = spectral::averaged_spectrum(tests::noise(4096, 7), 1000.0, base::Quantity::acceleration, options);
    const auto all = spectral::density_intervals(s);
    REQUIRE(all);
    REQUIRE(all->size() == s.density.size());
    for (std::size_t k = 0; k < all->size(); ++k) CHECK((*all)[k] == *spectral::density_interval(s, k));
  }
}
