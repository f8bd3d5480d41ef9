#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace stillmass::numeric {

/// A small dense real matrix, row by row.
class Matrix {
 public:
  Matrix() = default;
  Matrix(std::size_t rows, std::size_t columns) : columns_(columns), values_(rows * columns, 0.0), rows_(rows) {}

  std::size_t rows() const { return rows_; }
  std::size_t columns() const { return columns_; }
  double& operator()(std::size_t row, std::size_t column) { return values_[row * columns_ + column]; }
  double operator()(std::size_t row, std::size_t column) const { return values_[row * columns_ + column]; }
  std::span<double> row(std::size_t r) { return {values_.data() + r * columns_, columns_}; }
  std::span<const double> row(std::size_t r) const { return {values_.data() + r * columns_, columns_}; }
  std::span<double> values() { return values_; }
  std::span<const double> values() const { return values_; }

 private:
  std::size_t columns_ = 0;
  std::vector<double> values_;
  std::size_t rows_ = 0;
};

/// A x. The length of x must be A's number of columns.
std::vector<double> product(const Matrix& a, std::span<const double> x);
Matrix product(const Matrix& a, const Matrix& b);
Matrix transposed(const Matrix& a);

}  // namespace stillmass::numeric
