#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/nonlinear_fit.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {

template <class Model>
numeric::FitProblem problem(const std::vector<double>& x, const std::vector<double>& y, Model model) {
  return {x.size(),
          [&x, &y, model](std::span<const double> p, std::span<double> r) {
            for (std::size_t i = 0; i < x.size(); ++i) r[i] = model(p, x[i]) - y[i];
          },
          {}};
}

// NIST Statistical Reference Datasets, nonlinear regression (certified values from memory, the same from SciPy's
// curve_fit).
const std::vector<double> misra_x{77.6,  114.9, 141.1, 190.8, 239.9, 289.0, 332.8,
                                  378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760.0};
const std::vector<double> misra_y{10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02,
                                  44.82, 50.76, 55.05, 61.01, 66.40, 75.47, 81.78};
const std::vector<double> rat_x{9.0, 14.0, 21.0, 28.0, 42.0, 57.0, 63.0, 70.0, 79.0};
const std::vector<double> rat_y{8.93, 10.80, 18.59, 22.33, 39.35, 56.11, 61.73, 64.62, 67.08};

double misra(std::span<const double> b, double x) { return b[0] * (1.0 - std::exp(-b[1] * x)); }
double rat(std::span<const double> b, double x) { return b[0] / (1.0 + std::exp(b[1] - b[2] * x)); }

}  // namespace

TEST_CASE("Misra1a converges to the certified values from both starts") {
  for (const std::vector<double>& start : {std::vector<double>{500.0, 1e-4}, std::vector<double>{250.0, 5e-4}}) {
    const auto fit = numeric::nonlinear_fit(problem(misra_x, misra_y, misra), start);
    CHECK(fit.reason == numeric::StopReason::converged);
    // Differences for slopes: the place of the minimum is good to 8 digits, the uncertainties to 6.
    CHECK(fit.parameters[0] == Approx(2.3894212918e2).epsilon(1e-7));
    CHECK(fit.parameters[1] == Approx(5.5015643181e-4).epsilon(1e-7));
    CHECK(fit.u(0) == Approx(2.7070075241).epsilon(1e-5));
    CHECK(fit.u(1) == Approx(7.2668688436e-6).epsilon(1e-5));
    CHECK(fit.residual_sum == Approx(1.2455138894e-1).epsilon(1e-9));
    CHECK(fit.dof == 12.0);
  }
}

TEST_CASE("Rat42 converges to the certified values from both starts") {
  for (const std::vector<double>& start :
       {std::vector<double>{100.0, 1.0, 0.1}, std::vector<double>{75.0, 2.5, 0.07}}) {
    const auto fit = numeric::nonlinear_fit(problem(rat_x, rat_y, rat), start);
    CHECK(fit.parameters[0] == Approx(7.2462237576e1).epsilon(1e-7));
    CHECK(fit.parameters[1] == Approx(2.6180768402).epsilon(1e-7));
    CHECK(fit.parameters[2] == Approx(6.7359200066e-2).epsilon(1e-7));
    CHECK(fit.u(0) == Approx(1.7340283401).epsilon(1e-5));
    CHECK(fit.u(2) == Approx(3.4465663377e-3).epsilon(1e-5));
    CHECK(fit.residual_sum == Approx(8.0565229338).epsilon(1e-9));
  }
}

TEST_CASE("a bound holds and the others are fitted beside it") {
  numeric::FitOptions options;
  options.lower = {0.0, 0.0};
  options.upper = {200.0, 1.0};
  const auto fit = numeric::nonlinear_fit(problem(misra_x, misra_y, misra), {150.0, 5e-4}, options);
  CHECK(fit.parameters[0] == 200.0);
  CHECK(fit.at_bound[0]);
  CHECK(!fit.at_bound[1]);
  CHECK(fit.covariance(0, 0) == 0.0);
  CHECK(fit.dof == 13.0);
  // With b0 held the slope of the sum in b1 must vanish.
  double slope = 0.0;
  for (std::size_t i = 0; i < misra_x.size(); ++i) {
    const double e = std::exp(-fit.parameters[1] * misra_x[i]);
    slope += (200.0 * (1.0 - e) - misra_y[i]) * 200.0 * misra_x[i] * e;
  }
  CHECK(std::abs(slope) < 1e-3 * 200.0 * 760.0);
}

TEST_CASE("known uncertainties leave the covariance unscaled") {
  numeric::FitOptions options;
  options.absolute = true;
  const auto relative = numeric::nonlinear_fit(problem(rat_x, rat_y, rat), {75.0, 2.5, 0.07});
  const auto absolute = numeric::nonlinear_fit(problem(rat_x, rat_y, rat), {75.0, 2.5, 0.07}, options);
  CHECK(relative.u(0) == Approx(absolute.u(0) * std::sqrt(relative.residual_sum / relative.dof)).epsilon(1e-9));
}

TEST_CASE("an exact fit ends at rounding") {
  std::vector<double> y;
  for (const double x : misra_x) y.push_back(misra(std::vector<double>{240.0, 6e-4}, x));
  const auto fit = numeric::nonlinear_fit(problem(misra_x, y, misra), {500.0, 1e-4});
  CHECK(fit.reason != numeric::StopReason::too_many_steps);
  CHECK(fit.parameters[0] == Approx(240.0).epsilon(1e-10));
}

TEST_CASE("too few steps are said to be too few") {
  numeric::FitOptions options;
  options.max_iterations = 2;
  CHECK(numeric::nonlinear_fit(problem(misra_x, misra_y, misra), {500.0, 1e-4}, options).reason ==
        numeric::StopReason::too_many_steps);
}

TEST_CASE("a fit without enough residuals or with crossed bounds is a fault") {
  const std::vector<double> one{1.0};
  CHECK_THROWS_AS(numeric::nonlinear_fit(problem(one, one, misra), {1.0, 1.0}), base::Error);
  numeric::FitOptions options;
  options.lower = {1.0, 1.0};
  options.upper = {0.0, 2.0};
  CHECK_THROWS_AS(numeric::nonlinear_fit(problem(misra_x, misra_y, misra), {1.0, 1.0}, options), base::Error);
}
