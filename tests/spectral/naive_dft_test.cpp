#include "oracle/naive_dft.hpp"

#include <cmath>
#include <complex>

#include "spectral/fft.hpp"
#include "spectral/signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;

TEST_CASE("the naive transform gives the closed forms of an impulse, a constant and a cosine") {
  // The oracle itself. An impulse at t = 2: exp(-2 pi i k 2 / 7). A cosine on line 3 of 8: 4 there, 0 elsewhere.
  const auto impulse = tests::naive_dft(std::vector<double>{0, 0, 1, 0, 0, 0, 0});
  REQUIRE(impulse.size() == 4);
  for (std::size_t k = 0; k < 4; ++k) {
    CHECK(std::abs(impulse[k] - std::polar(1.0, -2.0 * std::numbers::pi * 2.0 * static_cast<double>(k) / 7.0)) < 1e-15);
  }
  std::vector<double> cosine(8, 1.0);
  tests::add_tone(cosine, 8.0, 3.0, std::numbers::sqrt2 / 2.0);
  const auto lines = tests::naive_dft(cosine);
  const double expected[] = {8.0, 0.0, 0.0, 4.0, 0.0};
  for (std::size_t k = 0; k < lines.size(); ++k) CHECK(std::abs(lines[k] - expected[k]) < 1e-14);
}

TEST_CASE("the fast transforms agree with the naive one for even, odd and prime lengths") {
  for (const std::size_t n : {1, 2, 3, 16, 45, 97, 250}) {
    const auto x = tests::noise(n, 11, n);
    const auto expected = tests::naive_dft(x);
    spectral::RealFft real(n);
    std::copy(x.begin(), x.end(), real.input().begin());
    const auto lines = real.run();
    spectral::ComplexFft complex(n);
    std::copy(x.begin(), x.end(), complex.values().begin());
    complex.run();
    REQUIRE(lines.size() == expected.size());
    CAPTURE(n);
    for (std::size_t k = 0; k < lines.size(); ++k) {
      // Rounding grows like sqrt(n log n) eps: below 1e-13 here.
      CHECK(std::abs(lines[k] - expected[k]) < 1e-13);
      CHECK(std::abs(complex.values()[k] - expected[k]) < 1e-13);
    }
  }
}

TEST_CASE("a copied transform shares nothing that the other one writes") {
  spectral::RealFft one(8);
  spectral::RealFft two(one);
  one.input()[0] = 1.0;
  two.input()[0] = 5.0;
  CHECK(one.run()[3].real() == Approx(1.0));
  CHECK(two.run()[3].real() == Approx(5.0));
  CHECK(one.run()[3].real() == Approx(1.0));
}
