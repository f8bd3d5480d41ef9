#include "stillmass/base/error.hpp"
#include "stillmass/numeric/distribution.hpp"

#include "support/catch.hpp"

using namespace stillmass::numeric;

TEST_CASE("distributions equal those of SciPy") {
  // scipy.stats 1.10: norm, chi2, t, f. Ten digits were kept.
  CHECK(normal_cdf(1.3) == Approx(0.9031995154143897).epsilon(1e-12));
  CHECK(normal_quantile(0.975) == Approx(1.959963984540054).epsilon(1e-12));
  CHECK(chi_square_cdf(7.3, 4.5) == Approx(0.8423127636505885).epsilon(1e-11));
  CHECK(chi_square_quantile(0.95, 10.0) == Approx(18.307038053275146).epsilon(1e-11));
  CHECK(student_cdf(-1.7, 2.6) == Approx(0.10076810486721849).epsilon(1e-11));
  CHECK(student_quantile(0.975, 3.0) == Approx(3.182446305284263).epsilon(1e-11));
  CHECK(f_cdf(2.2, 3.0, 7.5) == Approx(0.829472428898641).epsilon(1e-11));
  CHECK(f_quantile(0.95, 3.0, 10.0) == Approx(3.7082648190468435).epsilon(1e-11));
}

TEST_CASE("below zero nothing has a chi-square or an F") {
  CHECK(chi_square_cdf(-1.0, 3.0) == 0.0);
  CHECK(f_cdf(-1.0, 3.0, 4.0) == 0.0);
}

TEST_CASE("probabilities and degrees of freedom out of range are faults") {
  CHECK_THROWS_AS(normal_quantile(1.0), stillmass::base::Error);
  CHECK_THROWS_AS(student_quantile(0.5, 0.0), stillmass::base::Error);
}
