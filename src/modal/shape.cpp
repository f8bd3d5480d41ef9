#include "stillmass/modal/shape.hpp"

#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

namespace stillmass::modal {

std::vector<ShapeRatio> shape_ratios(std::span<const std::string> points,
                                     std::span<const std::complex<double>> strengths, std::size_t reference) {
  if (points.size() != strengths.size() || reference >= points.size() || strengths[reference] == 0.0) {
    throw base::Error(base::ErrorKind::internal, "modal/shape",
                      "a shape needs one strength a point and a reference that moves");
  }
  std::vector<ShapeRatio> shape;
  for (std::size_t p = 0; p < points.size(); ++p) {
    const std::complex<double> ratio = strengths[p] / strengths[reference];
    const double degrees = std::arg(ratio) * 180.0 / std::numbers::pi;
    shape.push_back({points[p], std::abs(ratio), degrees < 0.0 ? degrees + 360.0 : degrees});
  }
  return shape;
}

base::Estimate mass_at(const base::Estimate& mass, const base::Estimate& ratio) {
  base::Estimate result{mass.value / (ratio.value * ratio.value), {}, mass.dof, base::Quantity::mass};
  const auto of_mass = mass.relative();
  if (of_mass) result.u = result.value * std::hypot(*of_mass, 2.0 * ratio.relative().value_or(0.0));
  return result;
}

double shape_correlation(std::span<const std::complex<double>> a, std::span<const std::complex<double>> b) {
  if (a.size() != b.size()) throw base::Error(base::ErrorKind::internal, "modal/shape", "the shapes differ in length");
  std::complex<double> cross = 0.0;
  double aa = 0.0;
  double bb = 0.0;
  for (std::size_t p = 0; p < a.size(); ++p) {
    cross += std::conj(a[p]) * b[p];
    aa += std::norm(a[p]);
    bb += std::norm(b[p]);
  }
  return aa > 0.0 && bb > 0.0 ? std::norm(cross) / (aa * bb) : 0.0;
}

}  // namespace stillmass::modal
