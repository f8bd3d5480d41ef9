#include "stillmass/absorber/coupled.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::absorber {
namespace {

// Integral of |(b0 + b1 p + b2 p^2 + b3 p^3) / (a0 + a1 p + ... + a4 p^4)|^2 over w, p = i w, from minus to plus
// infinity, over 2 pi. Source: Newland, Random Vibrations, Appendix 1 (from memory, confirmed by quadrature).
double mean_square(const std::array<double, 5>& a, const std::array<double, 4>& b) {
  const double above =
      a[0] * b[3] * b[3] * (a[0] * a[3] - a[1] * a[2]) + a[0] * a[1] * a[4] * (2.0 * b[1] * b[3] - b[2] * b[2]) -
      a[0] * a[3] * a[4] * (b[1] * b[1] - 2.0 * b[0] * b[2]) + a[4] * b[0] * b[0] * (a[1] * a[4] - a[2] * a[3]);
  const double below = a[0] * a[4] * (a[0] * a[3] * a[3] + a[1] * a[1] * a[4] - a[1] * a[2] * a[3]);
  return 0.5 * above / below;
}

}  // namespace

std::array<double, 2> Coupled::splits() const {
  const double half_sum = 0.5 * (1.0 + tuning2_ * (1.0 + mass_ratio_));
  const double upper = half_sum + std::sqrt(std::max(0.0, half_sum * half_sum - tuning2_));
  return {tuning2_ / upper, upper};
}

WhiteResponse white_response(const Coupled& pair) {
  const double mu = pair.mass_ratio();
  const double z = 2.0 * pair.machine_damping();
  const double t = pair.tuning2();
  const double c = pair.coupling();
  const std::array<double, 5> a{t, c + z * t, 1.0 + t * (1.0 + mu) + z * c, c * (1.0 + mu) + z, 1.0};
  return {mean_square(a, {t, c, 1.0, 0.0}), mean_square(a, {0.0, t, c, 1.0}), mean_square(a, {0.0, 0.0, 1.0, 0.0})};
}

WhiteResponse white_response(double machine_damping) {
  const double both = 0.25 / machine_damping;
  return {both, both, 0.0};
}

}  // namespace stillmass::absorber
