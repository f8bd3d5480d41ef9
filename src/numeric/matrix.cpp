#include "stillmass/numeric/matrix.hpp"

#include <numeric>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

void require_fit(bool fits) {
  if (!fits) throw base::Error(base::ErrorKind::internal, "numeric/matrix", "the shapes of a product do not fit");
}

}  // namespace

std::vector<double> product(const Matrix& a, std::span<const double> x) {
  require_fit(a.columns() == x.size());
  std::vector<double> result(a.rows());
  for (std::size_t r = 0; r < a.rows(); ++r) {
    const auto row = a.row(r);
    result[r] = std::inner_product(row.begin(), row.end(), x.begin(), 0.0);
  }
  return result;
}

Matrix product(const Matrix& a, const Matrix& b) {
  require_fit(a.columns() == b.rows());
  Matrix result(a.rows(), b.columns());
  for (std::size_t r = 0; r < a.rows(); ++r) {
    for (std::size_t k = 0; k < a.columns(); ++k) {
      for (std::size_t c = 0; c < b.columns(); ++c) result(r, c) += a(r, k) * b(k, c);
    }
  }
  return result;
}

Matrix transposed(const Matrix& a) {
  Matrix result(a.columns(), a.rows());
  for (std::size_t r = 0; r < a.rows(); ++r) {
    for (std::size_t c = 0; c < a.columns(); ++c) result(c, r) = a(r, c);
  }
  return result;
}

}  // namespace stillmass::numeric
