#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/monte_carlo.hpp"

#include "support/catch.hpp"

namespace numeric = stillmass::numeric;
namespace base = stillmass::base;
using numeric::Distribution;
using numeric::Input;

namespace {

using Values = std::span<const double>;

numeric::Outcome sum_of(std::vector<Input> inputs, std::size_t count) {
  const numeric::Cases cases(std::move(inputs), {}, 7);
  return numeric::Outcome(numeric::evaluate(cases, count, {}, [](Values x) {
    double sum = 0.0;
    for (const double value : x) sum += value;
    return sum;
  }));
}

std::vector<Input> four(Distribution distribution, double last_u) {
  std::vector<Input> inputs(4, Input{"x", 0.0, 1.0, distribution});
  inputs.back().u = last_u;
  return inputs;
}

void check_half_width(const numeric::Outcome& outcome, double u, double half, double tolerance) {
  CHECK(outcome.u() == Approx(u).margin(tolerance));
  const auto interval = outcome.symmetric_interval(0.95);
  CHECK(interval.hi == Approx(half).margin(2.0 * tolerance));
  CHECK(interval.lo == Approx(-half).margin(2.0 * tolerance));
}

}  // namespace

TEST_CASE("the sum of four inputs spreads as JCGM 101, 9.2 says") {
  // CHECKS.md U3. With 400,000 cases the standard error of u is 0.11 % and that of an end of the interval about 0.3 %.
  constexpr std::size_t count = 400'000;
  check_half_width(sum_of(four(Distribution::normal, 1.0), count), 2.00, 3.92, 0.02);
  check_half_width(sum_of(four(Distribution::rectangular, 1.0), count), 2.00, 3.88, 0.02);
  check_half_width(sum_of(four(Distribution::rectangular, 10.0), count), 10.1, 17.0, 0.1);
}

TEST_CASE("the comparison loss is far from normal, which a first-order law of propagation misses") {
  // CHECKS.md U5 (JCGM 101, 9.4): Y = X1^2 + X2^2, both N(0, 0.005^2): mean 2 u^2, standard deviation 2 u^2, shortest
  // 95 % interval from 0 to -2 u^2 ln 0.05.
  const numeric::Cases cases({{"x1", 0.0, 0.005}, {"x2", 0.0, 0.005}}, {}, 11);
  const numeric::Outcome y(numeric::evaluate(cases, 400'000, {}, [](Values x) { return x[0] * x[0] + x[1] * x[1]; }));
  CHECK(y.mean() == Approx(50e-6).epsilon(0.01));
  CHECK(y.u() == Approx(50e-6).epsilon(0.01));
  const auto interval = y.shortest_interval(0.95);
  CHECK(interval.lo == Approx(0.0).margin(0.5e-6));
  CHECK(interval.hi == Approx(149.8e-6).epsilon(0.01));
}

TEST_CASE("correlated inputs give the resistance, reactance and impedance of GUM H.2") {
  // CHECKS.md U1: V 4.999 (3.2e-3), I 0.019661 (9.5e-6), phi 1.04446 (7.5e-4); r(V,I) -0.36, r(V,phi) 0.86,
  // r(I,phi) -0.65. Published: R 127.732 (0.070), X 219.85 (0.30), Z 254.26 (0.24); r -0.59, -0.49, 0.99.
  const numeric::Cases cases({{"V", 4.999, 3.2e-3}, {"I", 0.019661, 9.5e-6}, {"phi", 1.04446, 7.5e-4}},
                             {1.0, -0.36, 0.86, -0.36, 1.0, -0.65, 0.86, -0.65, 1.0}, 3);
  const auto all = numeric::evaluate(cases, 200'000, {}, [](Values x) {
    const double z = x[0] / x[1];
    return std::array<double, 3>{z * std::cos(x[2]), z * std::sin(x[2]), z};
  });
  std::array<std::vector<double>, 3> columns;
  for (const auto& row : all) {
    for (std::size_t i = 0; i < 3; ++i) columns[i].push_back(row[i]);
  }
  const numeric::Outcome r(columns[0]);
  const numeric::Outcome x(columns[1]);
  const numeric::Outcome z(columns[2]);
  CHECK(r.mean() == Approx(127.732).margin(0.001));
  CHECK(x.mean() == Approx(219.85).margin(0.01));
  CHECK(z.mean() == Approx(254.26).margin(0.01));
  // u to the last digit published.
  CHECK(r.u() == Approx(0.070).margin(0.001));
  CHECK(x.u() == Approx(0.2957).margin(0.005));
  CHECK(z.u() == Approx(0.2366).margin(0.005));
  const auto correlation = [&](std::size_t a, std::size_t b) {
    const numeric::Outcome first(columns[a]);
    const numeric::Outcome second(columns[b]);
    double sum = 0.0;
    for (std::size_t n = 0; n < columns[a].size(); ++n) {
      sum += (columns[a][n] - first.mean()) * (columns[b][n] - second.mean());
    }
    return sum / static_cast<double>(columns[a].size() - 1) / (first.u() * second.u());
  };
  CHECK(correlation(0, 1) == Approx(-0.59).margin(0.01));
  CHECK(correlation(0, 2) == Approx(-0.49).margin(0.01));
  CHECK(correlation(1, 2) == Approx(0.99).margin(0.005));
}

TEST_CASE("a lognormal input has the mean and the deviation it was given and is never negative") {
  const numeric::Cases cases({{"mass", 280.0, 140.0, Distribution::lognormal}}, {}, 5);
  const auto values = numeric::draw_all(cases, 200'000, {});
  const numeric::Outcome outcome(values);
  // Standard error of the mean 0.11 %, of u (kurtosis of this lognormal about 9) 0.3 %.
  CHECK(outcome.mean() == Approx(280.0).epsilon(0.005));
  CHECK(outcome.u() == Approx(140.0).epsilon(0.02));
  CHECK(outcome.quantile(0.0) > 0.0);
}

TEST_CASE("cases are the same bits on one thread and on many") {
  const numeric::Cases cases({{"a", 1.0, 0.1}, {"b", 2.0, 0.2, Distribution::lognormal}}, {1.0, 0.5, 0.5, 1.0}, 42);
  base::Context many;
  many.threads = 5;
  CHECK(numeric::draw_all(cases, 3001, {}) == numeric::draw_all(cases, 3001, many));
  const auto product = [](Values x) { return x[0] * x[1]; };
  CHECK(numeric::evaluate(cases, 3001, {}, product) == numeric::evaluate(cases, 3001, many, product));
}

TEST_CASE("inputs that move as one are taken, contradictory correlations are not") {
  const std::vector<Input> inputs{{"a", 0.0, 1.0}, {"b", 0.0, 2.0}, {"c", 0.0, 1.0}};
  const numeric::Cases one({inputs[0], inputs[1]}, {1.0, 1.0, 1.0, 1.0}, 1);
  std::array<double, 2> x{};
  one.draw(9, x);
  CHECK(x[1] == Approx(2.0 * x[0]).epsilon(1e-12));
  // a follows b, b follows c, and yet a runs against c.
  CHECK_THROWS_AS(numeric::Cases(inputs, {1.0, 0.9, -0.9, 0.9, 1.0, 0.9, -0.9, 0.9, 1.0}, 1), base::Error);
  CHECK_THROWS_AS(numeric::Cases(inputs, {1.0, 0.0}, 1), base::Error);
  CHECK_THROWS_AS(numeric::Cases({{"a", 1.0, -0.1}}, {}, 1), base::Error);
  CHECK_THROWS_AS(numeric::Cases({{"a", -1.0, 0.1, Distribution::lognormal}}, {}, 1), base::Error);
}

TEST_CASE("few degrees of freedom widen an input, an unknown uncertainty takes the stand-in") {
  const auto two = numeric::input_of("f", {10.0, 0.1, 2.0}, Distribution::normal, 0.5);
  CHECK(two.u == Approx(0.1 * 4.3027 / 1.95996).epsilon(1e-3));  // Student's t at 97.5 %, 2 degrees of freedom
  CHECK(numeric::input_of("f", {10.0, {}, {}}, Distribution::normal, 0.5).u == 0.5);
  const auto between = numeric::rectangular_input("t", {0.0, 12.0});
  CHECK(between.mean == 6.0);
  CHECK(between.u == Approx(12.0 / std::sqrt(12.0)).epsilon(1e-14));
}

TEST_CASE("the drivers of a spread are ranked, effects that are not monotone included") {
  // y = 3 a + b^2 with standard normal inputs: variances 9 and 2, so shares 9/11 and 2/11; c does nothing.
  const numeric::Cases cases({{"a", 0.0, 1.0}, {"b", 0.0, 1.0}, {"c", 0.0, 1.0}}, {}, 8);
  constexpr std::size_t count = 20'000;
  const auto draws = numeric::draw_all(cases, count, {});
  std::vector<double> y;
  for (std::size_t n = 0; n < count; ++n) y.push_back(3.0 * draws[3 * n] + draws[3 * n + 1] * draws[3 * n + 1]);
  const auto ranked = numeric::drivers(cases, draws, y);
  REQUIRE(ranked.size() == 3);
  CHECK(ranked[0].input == "a");
  CHECK(ranked[0].share == Approx(9.0 / 11.0).margin(0.02));
  CHECK(ranked[1].input == "b");
  CHECK(ranked[1].share == Approx(2.0 / 11.0).margin(0.02));  // 32 classes flatten a parabola's ends a little
  CHECK(ranked[2].share < 0.01);
}

TEST_CASE("quantiles are linear between the order statistics and fractions count what lies below") {
  const numeric::Outcome outcome({4.0, 1.0, 3.0, 2.0});
  CHECK(outcome.quantile(0.0) == 1.0);
  CHECK(outcome.median() == 2.5);
  CHECK(outcome.quantile(1.0) == 4.0);
  CHECK(outcome.fraction_up_to(3.0) == 0.75);
  CHECK(outcome.fraction_up_to(0.5) == 0.0);
  CHECK(outcome.u() == Approx(std::sqrt(5.0 / 3.0)).epsilon(1e-14));
  CHECK_THROWS_AS(numeric::Outcome({}), base::Error);
  CHECK_THROWS_AS(numeric::Outcome({1.0, std::nan("")}), base::Error);
}
