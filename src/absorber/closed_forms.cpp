#include "stillmass/absorber/closed_forms.hpp"

#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

namespace stillmass::absorber {
namespace {

void check(double mass_ratio) {
  if (!(mass_ratio > 0.0) || !std::isfinite(mass_ratio)) throw base::usage_error("mass ratio", "must be positive");
}

}  // namespace

Sizing classical(double mu, Forcing forcing) {
  check(mu);
  switch (forcing) {
    case Forcing::constant:
      return {1.0 / (1.0 + mu), std::sqrt(3.0 * mu / (8.0 * (1.0 + mu))), std::sqrt(1.0 + 2.0 / mu)};
    case Forcing::unbalance:
      return {1.0 / std::sqrt(1.0 + mu), std::sqrt(3.0 * mu / (8.0 * (1.0 + 0.5 * mu))),
              std::sqrt(2.0 / (mu * (1.0 + mu)))};
    case Forcing::base:
      if (mu >= 2.0) throw base::usage_error("mass ratio", "must be below 2 for a machine shaken by its base");
      return {std::sqrt(1.0 - 0.5 * mu) / (1.0 + mu), std::sqrt(3.0 * mu / (8.0 * (1.0 + mu) * (1.0 - 0.5 * mu))),
              (1.0 + mu) * std::sqrt(2.0 / mu)};
    case Forcing::random:
      return {std::sqrt(1.0 + 0.5 * mu) / (1.0 + mu),
              std::sqrt(mu * (1.0 + 0.75 * mu) / (4.0 * (1.0 + mu) * (1.0 + 0.5 * mu))),
              std::sqrt((1.0 + 0.75 * mu) / (mu * (1.0 + mu)))};
  }
  return {};
}

Sizing exact_constant(double mu) {
  check(mu);
  const double s = std::sqrt(4.0 + 3.0 * mu);
  const double tuning2 =
      2.0 * (16.0 + 23.0 * mu + 9.0 * mu * mu + 2.0 * (2.0 + mu) * s) / (3.0 * (64.0 + 80.0 * mu + 27.0 * mu * mu));
  const double sum = 8.0 + 9.0 * mu;
  const double height2 = (sum * sum * (16.0 + 9.0 * mu) - 128.0 * s * s * s) / (3.0 * (32.0 + 27.0 * mu));
  return {2.0 / (1.0 + mu) * std::sqrt(tuning2), 0.25 * std::sqrt((sum - 4.0 * s) / (1.0 + mu)),
          std::sqrt(height2) / (3.0 * mu)};
}

Sizing ioi_ikeda(double mu, double z) {
  check(mu);
  const double tuning = 1.0 / (1.0 + mu) - (0.241 + 1.7 * mu - 2.6 * mu * mu) * z - (1.0 - 1.9 * mu + mu * mu) * z * z;
  const double damping = std::sqrt(3.0 * mu / (8.0 * (1.0 + mu))) + (0.13 + 0.12 * mu + 0.4 * mu * mu) * z -
                         (0.01 + 0.9 * mu + 3.0 * mu * mu) * z * z;
  return {tuning, damping, 0.0};
}

Sizing houdaille(double mu) {
  check(mu);
  return {0.0, 1.0 / std::sqrt(2.0 * (1.0 + mu) * (2.0 + mu)), 1.0 + 2.0 / mu};
}

std::array<double, 2> fixed_points(double mu) {
  check(mu);
  const double half = std::sqrt(mu / (2.0 + mu));
  return {(1.0 - half) / (1.0 + mu), (1.0 + half) / (1.0 + mu)};
}

std::array<double, 2> undamped_splits(double mu) {
  check(mu);
  const double upper = 1.0 + 0.5 * mu + std::sqrt(mu + 0.25 * mu * mu);
  return {std::sqrt(1.0 / upper), std::sqrt(upper)};
}

double mass_ratio_for_split(double ratio) {
  const double r2 = ratio * ratio;
  return (r2 - 1.0) * (r2 - 1.0) / r2;
}

Canceller cancel(double force, double frequency_hz, double travel_m) {
  if (!(force > 0.0) || !(frequency_hz > 0.0) || !(travel_m > 0.0)) {
    throw base::usage_error("undamped absorber", "force, frequency and travel must be positive");
  }
  const double w = 2.0 * std::numbers::pi * frequency_hz;
  return {force / travel_m / (w * w), force / travel_m};
}

}  // namespace stillmass::absorber
