#include "absorber/response.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

#include "stillmass/numeric/root.hpp"

namespace stillmass::absorber {
namespace {

double power(double s, int exponent) {
  switch (exponent) {
    case -1:
      return 1.0 / s;
    case 0:
      return 1.0;
    case 1:
      return s;
    case 2:
      return s * s;
    default:
      return s * s * s;
  }
}

/// Newton for a peak from a point near it; nothing where it does not settle on a maximum nearby.
std::optional<double> settle(const Response& response, double start) {
  double s = start;
  for (int step = 0; step < 12; ++step) {
    const auto slope = response.log_slope(s);
    if (!(slope.second < 0.0)) return {};
    const double change = -slope.first / slope.second;
    s += change;
    if (!(std::abs(s - start) < 0.1 * start)) return {};
    // The next change would be near its square, and the height at a peak errs by the square of that.
    if (std::abs(change) < 1e-4 * s) return s;
  }
  return {};
}

/// The maximum between two points with a rising slope at the lower and a falling slope at the upper.
double peak_between(const Response& response, double lo, double hi) {
  double s = 0.5 * (lo + hi);
  for (int step = 0; step < 80; ++step) {
    const auto slope = response.log_slope(s);
    (slope.first > 0.0 ? lo : hi) = s;
    const double newton = s - slope.first / slope.second;
    const double next = slope.second < 0.0 && newton > lo && newton < hi ? newton : 0.5 * (lo + hi);
    if (std::abs(next - s) < 1e-10 * s) return next;
    s = next;
  }
  return s;
}

std::vector<double> spread(base::Interval range, int count) {
  std::vector<double> points;
  points.reserve(static_cast<std::size_t>(count));
  const double step = std::log(range.hi / range.lo) / (count - 1);
  for (int i = 0; i < count; ++i) points.push_back(range.lo * std::exp(step * i));
  points.back() = range.hi;
  return points;
}

}  // namespace

Response::Response(const Coupled& pair, Forcing forcing, Objective objective) : pair_(pair) {
  const bool velocity = objective == Objective::velocity;
  switch (forcing) {
    case Forcing::constant:
    case Forcing::random:
      power_ = velocity ? 1 : 0;
      break;
    case Forcing::unbalance:
      power_ = velocity ? 3 : 2;
      break;
    case Forcing::base:
      power_ = velocity ? -1 : 0;
      if (velocity) base_ = 4.0 * pair.machine_damping() * pair.machine_damping();
      if (!velocity) own_ = 1.0 + pair.mass_ratio();
      break;
  }
}

double Response::value(double s) const {
  const double a = own_ * pair_.tuning2() - s;
  const double b = own_ * pair_.coupling();
  return power(s, power_) * (1.0 + base_ * s) * (a * a + s * b * b) / pair_.denominator(s);
}

Response::Slope Response::log_slope(double s) const {
  const double mu = pair_.mass_ratio();
  const double z = pair_.machine_damping();
  const double t = pair_.tuning2();
  const double c = pair_.coupling();

  const double a = own_ * t - s;
  const double b = own_ * c;
  const double per_n = 1.0 / (a * a + s * b * b);
  const double n1 = (b * b - 2.0 * a) * per_n;
  const double n2 = 2.0 * per_n;

  const double real = (1.0 - s) * (t - s) - mu * t * s - 2.0 * z * c * s;
  const double real1 = 2.0 * s - (1.0 + t + mu * t + 2.0 * z * c);
  const double imag = c * (1.0 - (1.0 + mu) * s) + 2.0 * z * (t - s);
  const double imag1 = -c * (1.0 + mu) - 2.0 * z;
  const double per_d = 1.0 / (real * real + s * imag * imag);
  const double d1 = (2.0 * real * real1 + imag * imag + 2.0 * s * imag * imag1) * per_d;
  const double d2 = (2.0 * real1 * real1 + 4.0 * real + 4.0 * imag * imag1 + 2.0 * s * imag1 * imag1) * per_d;

  const double w1 = base_ == 0.0 ? 0.0 : base_ / (1.0 + base_ * s);
  const double per_s = 1.0 / s;
  return {power_ * per_s + w1 + n1 - d1, -power_ * per_s * per_s - w1 * w1 + n2 - n1 * n1 - d2 + d1 * d1};
}

Response::Sensitivity Response::sensitivity(double s) const {
  const double mu = pair_.mass_ratio();
  const double z = pair_.machine_damping();
  const double t = pair_.tuning2();
  const double c = pair_.coupling();

  const double a = own_ * t - s;
  const double b = own_ * c;
  const double n = a * a + s * b * b;
  const double real = (1.0 - s) * (t - s) - mu * t * s - 2.0 * z * c * s;
  const double imag = c * (1.0 - (1.0 + mu) * s) + 2.0 * z * (t - s);
  const double d = real * real + s * imag * imag;

  const double by_t = 2.0 * a * own_ / n - 2.0 * (real * (1.0 - s - mu * s) + s * imag * 2.0 * z) / d;
  const double by_c = 2.0 * s * b * own_ / n - 2.0 * (-2.0 * z * s * real + s * imag * (1.0 - (1.0 + mu) * s)) / d;
  return {2.0 * t * by_t + c * by_c, c * by_c};
}

base::Interval resonant_range(const Response& response) {
  const auto splits = response.pair().splits();
  const double ratio = splits[1] / splits[0];
  return {splits[0] / ratio, splits[1] * ratio};
}

std::optional<std::array<double, 2>> two_peaks(const Response& response,
                                               const std::optional<std::array<double, 2>>& hint) {
  if (hint) {
    const auto first = settle(response, (*hint)[0]);
    const auto second = settle(response, (*hint)[1]);
    if (first && second && *second - *first > 0.2 * ((*hint)[1] - (*hint)[0])) return std::array{*first, *second};
  }
  std::array<double, 2> found{};
  std::size_t count = 0;
  double before = 0.0;
  bool rising = false;
  constexpr int points = 80;
  const base::Interval range = resonant_range(response);
  const double ratio = std::pow(range.hi / range.lo, 1.0 / (points - 1));
  double s = range.lo;
  for (int i = 0; i < points; ++i, s *= ratio) {
    const bool rises = response.log_slope(s).first > 0.0;
    if (rising && !rises) {
      if (count == 2) return {};
      found[count++] = peak_between(response, before, s);
    }
    rising = rises;
    before = s;
  }
  if (count != 2) return {};
  return found;
}

double greatest(const Response& response, base::Interval range) {
  if (range.lo >= range.hi) return response.value(range.lo);
  // Away from the resonances the response has no peaks, so the ends stand for the rest.
  const base::Interval resonant = resonant_range(response);
  double best = std::max(response.value(range.lo), response.value(range.hi));
  const base::Interval inner{range.clamped(resonant.lo), range.clamped(resonant.hi)};
  if (!(inner.lo < inner.hi)) return best;
  auto points = spread(inner, 40);
  for (const double split : response.pair().splits()) {
    if (inner.contains(split)) points.push_back(split);
  }
  std::sort(points.begin(), points.end());
  std::vector<double> values;
  values.reserve(points.size());
  for (const double s : points) values.push_back(response.value(s));
  for (std::size_t i = 1; i + 1 < points.size(); ++i) {
    if (values[i] < values[i - 1] || values[i] < values[i + 1] || values[i] < 0.8 * best) continue;
    best = std::max({best, values[i], response.value(peak_between(response, points[i - 1], points[i + 1]))});
  }
  return std::max({best, values.front(), values.back()});
}

double velocity_weight(double machine_damping, Forcing forcing, double s) {
  switch (forcing) {
    case Forcing::constant:
    case Forcing::random:
      return s;
    case Forcing::unbalance:
      return s * s * s;
    case Forcing::base:
      return (1.0 + 4.0 * machine_damping * machine_damping * s) / s;
  }
  return s;
}

double bare_velocity(double machine_damping, Forcing forcing, double s) {
  const double bare = (1.0 - s) * (1.0 - s) + 4.0 * machine_damping * machine_damping * s;
  return velocity_weight(machine_damping, forcing, s) / bare;
}

}  // namespace stillmass::absorber
