#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/numeric/statistics.hpp"

#include "support/catch.hpp"

using namespace stillmass::numeric;

namespace {

const std::vector<double> x{3.1, -1.2, 0.4, 7.7, 2.2, 2.9, -0.5};
const std::vector<double> y{1.0, 0.2, -0.4, 3.1, 1.9, 0.6, 0.3};

}  // namespace

TEST_CASE("location, scale and shape equal those of NumPy and SciPy") {
  RunningMoments moments;
  moments.add(x);
  CHECK(quantile(x, 0.3) == Approx(0.22).epsilon(1e-12));
  CHECK(median(x) == 2.2);
  CHECK(mad_scale(x) == Approx(2.66868).epsilon(1e-12));
  CHECK(*moments.variance() == Approx(8.924761904761903).epsilon(1e-13));
  CHECK(*moments.rms() == Approx(3.4641016151377544).epsilon(1e-13));
  CHECK(*kurtosis(x) == Approx(2.842403288384583).epsilon(1e-12));
  CHECK(*correlation(x, y) == Approx(0.8630223556617681).epsilon(1e-12));
}

TEST_CASE("quantiles reach the ends") {
  CHECK(quantile(x, 0.0) == -1.2);
  CHECK(quantile(x, 1.0) == 7.7);
  CHECK(quantile({5.0}, 0.4) == 5.0);
  CHECK_THROWS_AS(quantile({}, 0.5), stillmass::base::Error);
}

TEST_CASE("merged moments equal those of one pass, on a large offset too") {
  const Random random(7);
  RunningMoments whole;
  RunningMoments left;
  RunningMoments right;
  RunningCorrelation all;
  RunningCorrelation first;
  RunningCorrelation second;
  for (std::uint64_t i = 0; i < 5000; ++i) {
    const double a = 1e6 + random.normal(i, 0);
    const double b = 0.5 * a + random.normal(i, 1);
    whole.add(a);
    all.add(a, b);
    (i < 1234 ? left : right).add(a);
    (i < 1234 ? first : second).add(a, b);
  }
  left.merge(right);
  first.merge(second);
  CHECK(left.count() == 5000);
  CHECK(left.mean() == Approx(whole.mean()).epsilon(1e-14));
  // One part in 1e16 of the offset against a scatter of 1, over 5000 values.
  CHECK(*left.variance() == Approx(*whole.variance()).epsilon(1e-8));
  CHECK(*left.kurtosis() == Approx(*whole.kurtosis()).epsilon(1e-6));
  CHECK(*whole.kurtosis() == Approx(3.0).epsilon(0.1));  // normal values: 3 +- sqrt(24 / n) = 0.07
  CHECK(*first.correlation() == Approx(*all.correlation()).epsilon(1e-8));
}

TEST_CASE("what does not vary has no kurtosis and no correlation") {
  const std::vector<double> flat(4, 2.0);
  CHECK(!kurtosis(flat));
  CHECK(!correlation(flat, flat));
  CHECK(!RunningMoments().variance());
  CHECK(!RunningMoments().rms());
}
