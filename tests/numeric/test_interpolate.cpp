#include <cmath>
#include <numbers>
#include <random>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/interpolate.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

constexpr double pi = std::numbers::pi;

double decibel(double ratio) { return 20.0 * std::log10(ratio); }

// Largest magnitude, between the samples, of what comes out for a tone at `frequency` (in half rates) of amplitude 1,
// and the largest deviation from that tone.
struct Tone {
  double highest = 0.0;
  double error = 0.0;
};
Tone interpolated_tone(const numeric::KaiserSinc& kernel, double frequency, double bandwidth) {
  std::vector<double> x(1200);
  for (std::size_t i = 0; i < x.size(); ++i) x[i] = std::cos(pi * frequency * static_cast<double>(i));
  Tone out;
  for (double at = 500.0; at < 700.0; at += 0.137) {
    const double y = kernel.at(x, at, bandwidth);
    out.highest = std::max(out.highest, std::abs(y));
    out.error = std::max(out.error, std::abs(y - std::cos(pi * frequency * at)));
  }
  return out;
}

}  // namespace

TEST_CASE("straight lines meet the knots and hold the end values outside") {
  const std::vector<double> x = {1.0, 2.0, 4.0};
  const std::vector<double> y = {10.0, 20.0, 0.0};
  CHECK(numeric::linear(x, y, 1.5) == Approx(15.0));
  CHECK(numeric::linear(x, y, 3.0) == Approx(10.0));
  CHECK(numeric::linear(x, y, 2.0) == 20.0);
  CHECK(numeric::linear(x, y, 0.0) == 10.0);
  CHECK(numeric::linear(x, y, 9.0) == 0.0);
}

TEST_CASE("the monotone cubic is SciPy's PchipInterpolator") {
  // scipy.interpolate.PchipInterpolator 1.10.1 on these knots, value and derivative; tolerance: rounding.
  const numeric::MonotoneCubic curve({0, 1, 2.5, 3, 4.2, 6.0}, {0, 0.5, 2.0, 2.0, 1.0, 4.0});
  struct Row {
    double at, value, slope;
  };
  const Row row =
      GENERATE(Row{0.3, 0.11101304347826087, 0.43578260869565216}, Row{1.7, 1.3049661835748794, 1.3542028985507248},
               Row{2.75, 2.0, 0.0}, Row{3.6, 1.5, -1.25}, Row{5.0, 1.6255144032921809, 1.5308641975308641},
               Row{5.9, 3.6907921810699595, 3.016975308641976}, Row{0.0, 0.0, 0.3}, Row{1.0, 0.5, 0.6521739130434783},
               Row{6.0, 4.0, 3.1666666666666665});
  CHECK(curve.value(row.at) == Approx(row.value).epsilon(1e-13).margin(1e-14));
  CHECK(curve.slope(row.at) == Approx(row.slope).epsilon(1e-13).margin(1e-14));
}

TEST_CASE("the inverse of an ascending monotone cubic gives the place back, outside the knots too") {
  const numeric::MonotoneCubic curve({0, 1, 2, 5}, {0, 0.8, 2.0, 5.0});
  for (double at = -1.0; at < 7.0; at += 0.0731) {
    CHECK(curve.inverse(curve.value(at)) == Approx(at).epsilon(1e-10).margin(1e-10));
  }
}

TEST_CASE("knots that do not ascend are a fault") {
  CHECK_THROWS_AS(numeric::MonotoneCubic({0, 1, 1}, {0, 1, 2}), base::Error);
  CHECK_THROWS_AS(numeric::MonotoneCubic({0}, {0}), base::Error);
}

TEST_CASE("band-limited interpolation keeps what lies below 0.8 and removes what lies above 1.2 of its cut-off") {
  const numeric::KaiserSinc kernel;
  const double bandwidth = GENERATE(1.0, 0.61, 0.2);
  for (const double share : {0.02, 0.3, 0.7, 0.79}) {
    CHECK(interpolated_tone(kernel, share * bandwidth, bandwidth).error < 2e-5);
  }
  if (bandwidth < 0.8) {
    for (const double share : {1.21, 1.25, 1.4}) {
      CHECK(decibel(interpolated_tone(kernel, share * bandwidth, bandwidth).highest) < -98.0);
    }
  }
}
