#include <algorithm>
#include <cmath>
#include <limits>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/decomposition.hpp"
#include "stillmass/numeric/random.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using numeric::Matrix;
using Complex = std::complex<double>;

namespace {

Matrix filled(std::size_t rows, std::size_t columns, std::uint64_t seed) {
  Matrix a(rows, columns);
  const numeric::Random random(seed);
  for (std::size_t i = 0; i < a.values().size(); ++i) a.values()[i] = random.normal(i, 0);
  return a;
}

double largest_difference(const Matrix& a, const Matrix& b) {
  double largest = 0.0;
  for (std::size_t i = 0; i < a.values().size(); ++i)
    largest = std::max(largest, std::abs(a.values()[i] - b.values()[i]));
  return largest;
}

}  // namespace

TEST_CASE("singular values put the matrix together again") {
  const Matrix a = filled(7, 4, 1);
  const numeric::SingularValues svd = numeric::singular_values(a);
  Matrix scaled = svd.u;
  for (std::size_t r = 0; r < scaled.rows(); ++r) {
    for (std::size_t c = 0; c < scaled.columns(); ++c) scaled(r, c) *= svd.s[c];
  }
  CHECK(largest_difference(numeric::product(scaled, numeric::transposed(svd.v)), a) < 1e-13);
  CHECK(std::ranges::is_sorted(svd.s, std::greater{}));
}

TEST_CASE("a solution of least norm is found where columns repeat") {
  Matrix a(3, 2);
  for (std::size_t r = 0; r < 3; ++r) a(r, 0) = a(r, 1) = 1.0;
  const auto solution = numeric::solve_least_norm(a, std::vector<double>{1.0, 2.0, 3.0});
  CHECK(solution.rank == 1);
  CHECK(solution.x[0] == Approx(1.0).epsilon(1e-14));  // 2 = x0 + x1, halves: the least norm
  CHECK(solution.x[1] == Approx(1.0).epsilon(1e-14));
  CHECK(std::isinf(solution.condition));
}

TEST_CASE("a two-mass chain has the natural frequencies of the textbook") {
  // Equal masses and springs, wall-k-m-k-m: w^2 = (3 -+ sqrt 5) / 2 k/m.
  Matrix k(2, 2);
  k(0, 0) = 2.0;
  k(0, 1) = k(1, 0) = -1.0;
  k(1, 1) = 1.0;
  Matrix m(2, 2);
  m(0, 0) = m(1, 1) = 1.0;
  const auto eigen = numeric::eigen_symmetric(k, m);
  CHECK(eigen.values[0] == Approx((3.0 - std::sqrt(5.0)) / 2.0).epsilon(1e-14));
  CHECK(eigen.values[1] == Approx((3.0 + std::sqrt(5.0)) / 2.0).epsilon(1e-14));
  CHECK(numeric::eigen_symmetric(k).values[0] == Approx(eigen.values[0]).epsilon(1e-14));
}

TEST_CASE("generalised eigenvectors are scaled to unit modal mass") {
  const Matrix base = filled(4, 4, 5);
  Matrix m = numeric::product(base, numeric::transposed(base));
  for (std::size_t i = 0; i < 4; ++i) m(i, i) += 1.0;
  const Matrix other = filled(4, 4, 6);
  const Matrix k = numeric::product(other, numeric::transposed(other));
  const auto eigen = numeric::eigen_symmetric(k, m);
  const Matrix vt = numeric::transposed(eigen.vectors);
  const Matrix unit = numeric::product(vt, numeric::product(m, eigen.vectors));
  const Matrix values = numeric::product(vt, numeric::product(k, eigen.vectors));
  for (std::size_t i = 0; i < 4; ++i) {
    CHECK(unit(i, i) == Approx(1.0).epsilon(1e-12));
    CHECK(values(i, i) == Approx(eigen.values[i]).epsilon(1e-10));
  }
}

TEST_CASE("a rotation has eigenvalues on the unit circle") {
  Matrix a(2, 2);
  a(0, 0) = a(1, 1) = std::cos(0.3);
  a(0, 1) = -std::sin(0.3);
  a(1, 0) = std::sin(0.3);
  auto values = numeric::eigenvalues(a);
  std::ranges::sort(values, {}, [](Complex z) { return z.imag(); });
  CHECK(std::abs(values[1] - std::polar(1.0, 0.3)) < 1e-14);
  CHECK(std::abs(values[0] - std::polar(1.0, -0.3)) < 1e-14);
}

TEST_CASE("polynomial roots are those it was made of") {
  const std::vector<Complex> roots{{1.0, 0.0}, {-2.0, 0.5}, {0.3, -1.7}, {4.0, 3.0}, {0.0, 0.0}};
  std::vector<Complex> coefficients{1.0};
  for (const Complex root : roots) {
    std::vector<Complex> next(coefficients.size() + 1, 0.0);
    for (std::size_t i = 0; i < coefficients.size(); ++i) {
      next[i] -= root * coefficients[i];
      next[i + 1] += coefficients[i];
    }
    coefficients = next;
  }
  coefficients.push_back(0.0);
  const auto found = numeric::polynomial_roots(coefficients);
  REQUIRE(found.size() == roots.size());
  for (const Complex root : roots) {
    CHECK(std::ranges::any_of(found, [&](Complex z) { return std::abs(z - root) < 1e-12; }));
  }
  CHECK(numeric::polynomial_roots(std::vector<Complex>{3.0}).empty());
}

TEST_CASE("a positive definite matrix is inverted and any other is not") {
  const Matrix a = filled(5, 5, 3);
  Matrix m = numeric::product(a, numeric::transposed(a));
  const auto inverse = numeric::inverse_positive_definite(m);
  REQUIRE(inverse);
  const Matrix unit = numeric::product(m, *inverse);
  for (std::size_t i = 0; i < 5; ++i) CHECK(unit(i, i) == Approx(1.0).epsilon(1e-9));
  const auto l = numeric::cholesky(m);
  REQUIRE(l);
  CHECK(largest_difference(numeric::product(*l, numeric::transposed(*l)), m) < 1e-12);
  m(0, 0) = -1.0;
  CHECK(!numeric::inverse_positive_definite(m));
}

TEST_CASE("numbers that are not finite and shapes that do not fit are faults") {
  Matrix a(2, 2);
  a(0, 0) = std::numeric_limits<double>::quiet_NaN();
  CHECK_THROWS_AS(numeric::singular_values(a), base::Error);
  CHECK_THROWS_AS(numeric::eigenvalues(Matrix(2, 3)), base::Error);
  CHECK_THROWS_AS(numeric::polynomial_roots(std::vector<Complex>{0.0}), base::Error);
}
