#include <cmath>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/fir.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;

std::vector<double> tone(double frequency, std::size_t count) {
  std::vector<double> signal(count);
  for (std::size_t i = 0; i < count; ++i) signal[i] = std::cos(two_pi * frequency * static_cast<double>(i));
  return signal;
}

double largest_gain(const std::vector<double>& taps, double from, double to) {
  double largest = 0.0;
  for (int i = 0; i <= 2000; ++i)
    largest = std::max(largest, std::abs(numeric::gain(taps, from + (to - from) * i / 2000)));
  return largest;
}

double largest_error(const std::vector<double>& a, const std::vector<double>& b, std::size_t skip) {
  double largest = 0.0;
  for (std::size_t i = skip; i + skip < a.size(); ++i) largest = std::max(largest, std::abs(a[i] - b[i]));
  return largest;
}

}  // namespace

TEST_CASE("Kaiser's beta and the taps of a low-pass are those of SciPy") {
  // scipy.signal.kaiser_beta(80), (40), SciPy 1.10
  CHECK(numeric::kaiser_beta(80.0) == Approx(7.85726).epsilon(1e-12));
  CHECK(numeric::kaiser_beta(40.0) == Approx(3.3953210522614574).epsilon(1e-12));
  CHECK(numeric::kaiser_beta(20.0) == 0.0);
  // scipy.signal.firwin(53, 0.25, window=("kaiser", kaiser_beta(80)), fs=1), the middle tap and its neighbours
  const auto taps = numeric::kaiser_low_pass(0.2, 0.3, 80.0);
  REQUIRE(taps.size() == 53);
  CHECK(taps[26] == Approx(0.4999895793348128).epsilon(1e-12));
  CHECK(taps[27] == Approx(0.3165795708381854).epsilon(1e-12));
  CHECK(taps[25] == taps[27]);
  CHECK(taps[29] == Approx(-0.10102702282064753).epsilon(1e-12));
}

TEST_CASE("a low-pass keeps its pass band and its attenuation") {
  for (const double attenuation : {60.0, 80.0, 100.0, 120.0}) {
    const auto taps = numeric::kaiser_low_pass(0.21, 0.25, attenuation);
    // Kaiser's length is an estimate: 1 dB is its own tolerance.
    const double ripple = std::pow(10.0, -(attenuation - 1.0) / 20.0);
    CHECK(largest_gain(taps, 0.25, 0.5) < ripple);
    for (int i = 0; i <= 500; ++i) CHECK(std::abs(numeric::gain(taps, 0.21 * i / 500) - 1.0) < ripple);
    CHECK(numeric::gain(taps, 0.0) == Approx(1.0).epsilon(1e-14));
  }
}

TEST_CASE("every second tap of a half-band filter is zero and its gains at f and 0.5 - f add to 1") {
  const auto taps = numeric::half_band(0.2, 100.0);
  const std::size_t half = taps.size() / 2;
  CHECK(taps[half] == 0.5);
  for (std::size_t k = 2; k <= half; k += 2) CHECK(taps[half + k] == 0.0);
  CHECK(taps.back() != 0.0);
  for (const double f : {0.0, 0.07, 0.13, 0.2, 0.24}) {
    CHECK(numeric::gain(taps, f) + numeric::gain(taps, 0.5 - f) == Approx(1.0).epsilon(1e-12));
  }
  CHECK(largest_gain(taps, 0.3, 0.5) < std::pow(10.0, -99.0 / 20.0));
}

TEST_CASE("decimation keeps a tone in the pass band at its instants, without delay") {
  for (const std::size_t factor : {2U, 4U, 8U, 16U, 128U}) {
    const double f = 0.41 / static_cast<double>(factor);
    const std::size_t count = 1000 * factor + 3;
    const auto out = numeric::decimated(tone(f, count), factor);
    REQUIRE(out.size() == (count + factor - 1) / factor);
    const std::size_t edge = numeric::PyramidDecimator(factor).half_length() / factor + 1;
    // Up to seven stages of 100 dB: a ripple of 1e-5 each.
    CHECK(largest_error(out, tone(0.41, out.size()), edge) < 7e-5);
  }
}

TEST_CASE("nothing above half the output rate folds back above -95 dB") {
  for (const std::size_t factor : {2U, 8U, 64U}) {
    for (const double f : {0.501, 0.6, 0.999, 1.3, 3.7}) {
      const double fraction = f / static_cast<double>(factor);
      if (fraction > 0.5) continue;
      const auto out = numeric::decimated(tone(fraction, 1000 * factor), factor);
      const std::size_t edge = numeric::PyramidDecimator(factor).half_length() / factor + 1;
      CHECK(largest_error(out, std::vector<double>(out.size(), 0.0), edge) < std::pow(10.0, -95.0 / 20.0));
    }
  }
}

TEST_CASE("a decimator gives the same samples however its input is cut") {
  std::vector<double> signal(5003);
  for (std::size_t i = 0; i < signal.size(); ++i) signal[i] = std::sin(0.37 * static_cast<double>(i * i % 911));
  const auto whole = numeric::decimated(signal, 8);
  numeric::PyramidDecimator decimator(8);
  std::vector<double> pieces;
  std::size_t at = 0;
  for (std::size_t size = 1; at < signal.size(); size = size * 3 + 1) {
    const std::size_t count = std::min(size, signal.size() - at);
    decimator.push(std::span(signal).subspan(at, count), pieces);
    at += count;
  }
  decimator.finish(pieces);
  CHECK(pieces == whole);
}

TEST_CASE("a factor of 1 gives the signal back, and an empty signal stays empty") {
  const auto signal = tone(0.3, 100);
  CHECK(numeric::decimated(signal, 1) == signal);
  CHECK(numeric::decimated({}, 8).empty());
}

TEST_CASE("impossible filters are refused") {
  CHECK_THROWS_AS(numeric::kaiser_low_pass(0.3, 0.2, 80.0), base::Error);
  CHECK_THROWS_AS(numeric::kaiser_low_pass(0.3, 0.6, 80.0), base::Error);
  CHECK_THROWS_AS(numeric::kaiser_low_pass(0.1, 0.2, std::nan("")), base::Error);
  CHECK_THROWS_AS(numeric::half_band(0.25, 80.0), base::Error);
  CHECK_THROWS_AS(numeric::PyramidDecimator(6), base::Error);
  CHECK_THROWS_AS(numeric::Decimator(std::vector<double>{0.5, 0.5}, 2), base::Error);
  CHECK_THROWS_AS(numeric::Decimator(std::vector<double>{0.2, 0.5, 0.3}, 2), base::Error);
}
