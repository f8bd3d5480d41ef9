#include <array>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/least_squares.hpp"
#include "stillmass/numeric/random.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using numeric::Matrix;

TEST_CASE("the Longley data give the certified coefficients") {
  // NIST Statistical Reference Datasets, linear least squares, Longley (1967): certified values (from memory; the same
  // from an exact solution of the normal equations).
  constexpr std::array<std::array<double, 7>, 16> data{{{60323, 83.0, 234289, 2356, 1590, 107608, 1947},
                                                        {61122, 88.5, 259426, 2325, 1456, 108632, 1948},
                                                        {60171, 88.2, 258054, 3682, 1616, 109773, 1949},
                                                        {61187, 89.5, 284599, 3351, 1650, 110929, 1950},
                                                        {63221, 96.2, 328975, 2099, 3099, 112075, 1951},
                                                        {63639, 98.1, 346999, 1932, 3594, 113270, 1952},
                                                        {64989, 99.0, 365385, 1870, 3547, 115094, 1953},
                                                        {63761, 100.0, 363112, 3578, 3350, 116219, 1954},
                                                        {66019, 101.2, 397469, 2904, 3048, 117388, 1955},
                                                        {67857, 104.6, 419180, 2822, 2857, 118734, 1956},
                                                        {68169, 108.4, 442769, 2936, 2798, 120445, 1957},
                                                        {66513, 110.8, 444546, 4681, 2637, 121950, 1958},
                                                        {68655, 112.6, 482704, 3813, 2552, 123366, 1959},
                                                        {69564, 114.2, 502601, 3931, 2514, 125368, 1960},
                                                        {69331, 115.7, 518173, 4806, 2572, 127852, 1961},
                                                        {70551, 116.9, 554894, 4007, 2827, 130081, 1962}}};
  constexpr std::array<double, 7> certified{-3482258.63459582, 15.0618722713733,  -0.0358191792925910,
                                            -2.02022980381683, -1.03322686717359, -0.0511041056535807,
                                            1829.15146461355};
  constexpr std::array<double, 7> deviation{890420.383607373,  84.9149257747669,  0.0334910077722432, 0.488399681651699,
                                            0.214274163161675, 0.226073200069370, 455.478499142212};
  Matrix design(16, 7);
  std::vector<double> y;
  for (std::size_t r = 0; r < 16; ++r) {
    y.push_back(data[r][0]);
    design(r, 0) = 1.0;
    for (std::size_t c = 1; c < 7; ++c) design(r, c) = data[r][c];
  }
  const auto fit = numeric::least_squares(design, y);
  // The columns are nearly dependent (condition 4e4 when scaled, 5e9 not): 10 of 16 digits remain.
  for (std::size_t c = 0; c < 7; ++c) {
    CHECK(fit.x[c] == Approx(certified[c]).epsilon(1e-9));
    CHECK(std::sqrt(fit.covariance(c, c)) == Approx(deviation[c]).epsilon(1e-9));
  }
  CHECK(fit.residual_sum == Approx(836424.055505915).epsilon(1e-10));
  CHECK(fit.dof == 9.0);
}

TEST_CASE("absolute weights give the uncertainty of the mean whatever the scatter") {
  // Weighted mean of independent observations: u^2 = 1 / sum 1/u_i^2.
  Matrix design(3, 1);
  for (std::size_t r = 0; r < 3; ++r) design(r, 0) = 1.0;
  const std::vector<double> y{10.0, 11.0, 14.0};
  const std::vector<double> weights{1.0, 4.0, 0.25};
  const auto fit = numeric::least_squares(design, y, weights, numeric::Weights::absolute);
  CHECK(fit.x[0] == Approx((10.0 + 44.0 + 3.5) / 5.25).epsilon(1e-14));
  CHECK(fit.covariance(0, 0) == Approx(1.0 / 5.25).epsilon(1e-14));
}

TEST_CASE("a complex fit returns the numbers it was made of and their scatter") {
  const std::vector<std::complex<double>> truth{{1.5, -0.7}, {-2.0, 0.3}};
  std::vector<double> error(2, 0.0);
  std::vector<double> claimed(2, 0.0);
  constexpr int trials = 400;
  for (int trial = 0; trial < trials; ++trial) {
    const numeric::Random random(static_cast<std::uint64_t>(trial) + 1);
    std::vector<std::complex<double>> design;
    std::vector<std::complex<double>> y;
    for (std::uint64_t k = 0; k < 20; ++k) {
      const std::complex<double> a(random.normal(k, 0), random.normal(k, 1));
      design.insert(design.end(), {1.0, a});
      y.push_back(truth[0] + a * truth[1] + 0.1 * std::complex<double>(random.normal(k, 2), random.normal(k, 3)));
    }
    const auto fit = numeric::least_squares(design, 2, y);
    CHECK(fit.dof == 36.0);
    for (std::size_t i = 0; i < 2; ++i) {
      error[i] += std::norm(fit.x[i] - truth[i]) / trials;
      claimed[i] += (fit.covariance(2 * i, 2 * i) + fit.covariance(2 * i + 1, 2 * i + 1)) / trials;
    }
  }
  // 400 trials of two numbers: the mean square is known to 5 %; three times that is allowed.
  for (std::size_t i = 0; i < 2; ++i) CHECK(claimed[i] == Approx(error[i]).epsilon(0.15));
}

TEST_CASE("too few observations and negative weights are faults") {
  CHECK_THROWS_AS(numeric::least_squares(Matrix(1, 2), std::vector<double>{1.0}), base::Error);
  CHECK_THROWS_AS(numeric::least_squares(Matrix(2, 1), std::vector<double>{1.0, 2.0}, std::vector<double>{1.0, -1.0}),
                  base::Error);
}
