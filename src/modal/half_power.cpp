#include "stillmass/modal/half_power.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <optional>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::modal {
namespace {

/// Powers of the frequency from the receptance to that kind.
double power(ResponseKind kind) {
  switch (kind) {
    case ResponseKind::receptance:
      return 0.0;
    case ResponseKind::mobility:
      return 1.0;
    case ResponseKind::accelerance:
      return 2.0;
  }
  return 0.0;
}

/// A magnitude between its lines: 1 / |receptance|^2 as a parabola in f^2 through the three lines nearest.
class Curve {
 public:
  Curve(std::span<const double> magnitude, double line_hz, ResponseKind kind)
      : magnitude_(magnitude), line_hz_(line_hz), power_(power(kind)) {}

  double frequency(std::size_t k) const { return static_cast<double>(k) * line_hz_; }

  double operator()(double f) const {
    const auto nearest = static_cast<std::size_t>(std::llround(f / line_hz_));
    const std::size_t k = std::clamp<std::size_t>(nearest, 2, magnitude_.size() - 2);
    const std::array<double, 3> x{square(frequency(k - 1)), square(frequency(k)), square(frequency(k + 1))};
    double inverse = 0.0;
    for (std::size_t i = 0; i < 3; ++i) {
      double share = inverse_receptance(k + i - 1);
      for (std::size_t j = 0; j < 3; ++j) share *= i == j ? 1.0 : (square(f) - x[j]) / (x[i] - x[j]);
      inverse += share;
    }
    // Noise can push the parabola through 0; the nearest line stands in there.
    if (!(inverse > 0.0)) return magnitude_[k];
    return std::pow(f, power_) / std::sqrt(inverse);
  }

 private:
  static double square(double x) { return x * x; }
  double inverse_receptance(std::size_t k) const {
    return std::pow(frequency(k), 2.0 * power_) / std::max(square(magnitude_[k]), 1e-300);
  }

  std::span<const double> magnitude_;
  double line_hz_;
  double power_;
};

double highest_between(const Curve& curve, double lo, double hi) {
  constexpr double golden = std::numbers::phi - 1.0;
  double a = hi - golden * (hi - lo);
  double b = lo + golden * (hi - lo);
  for (int i = 0; i < 60; ++i) {
    if (curve(a) > curve(b)) {
      hi = b;
      b = a;
      a = hi - golden * (hi - lo);
    } else {
      lo = a;
      a = b;
      b = lo + golden * (hi - lo);
    }
  }
  return 0.5 * (lo + hi);
}

/// Where the curve passes `level` between an inside frequency (above it) and an outside one (below it).
double crossing(const Curve& curve, double inside, double outside, double level) {
  for (int i = 0; i < 60; ++i) {
    const double middle = 0.5 * (inside + outside);
    (curve(middle) > level ? inside : outside) = middle;
  }
  return 0.5 * (inside + outside);
}

struct Descent {
  double frequency;
  bool reached;
};

/// From the peak's line outwards to the first line under `level`; gives up where a line rises above the peak again.
Descent descend(std::span<const double> magnitude, const Curve& curve, std::size_t peak, int direction, double peak_hz,
                double level, base::Interval limits) {
  double inside = peak_hz;
  for (auto k = static_cast<std::ptrdiff_t>(peak) + direction; k >= 1 && k + 1 < std::ssize(magnitude);
       k += direction) {
    const auto line = static_cast<std::size_t>(k);
    const double f = curve.frequency(line);
    if (!limits.contains(f) || magnitude[line] > magnitude[peak]) break;
    if (magnitude[line] < level) return {crossing(curve, inside, f, level), true};
    inside = f;
  }
  return {inside, false};
}

}  // namespace

FrequencyAndDamping from_half_power(double f1, double f2, ResponseKind kind) {
  if (!(f1 > 0.0 && f2 > f1)) {
    throw base::Error(base::ErrorKind::internal, "modal/half_power", "half-power frequencies must be > 0 and rise");
  }
  if (kind == ResponseKind::mobility) {
    const double f = std::sqrt(f1 * f2);
    return {f, (f2 - f1) / (2.0 * f)};
  }
  const double a = f1 * f1;
  const double b = f2 * f2;
  // tan of twice the angle whose sine is z; the same figure for both kinds.
  const double twice = std::atan2(b - a, b + a);
  const double f_square =
      kind == ResponseKind::receptance ? 0.5 * (a + b) / std::cos(twice) : 2.0 * std::cos(twice) * a * b / (a + b);
  return {std::sqrt(f_square), std::sin(0.5 * twice)};
}

base::Interval half_power_frequencies(const FrequencyAndDamping& system, ResponseKind kind) {
  const double z = system.damping_ratio;
  const double f = system.frequency_hz;
  if (kind == ResponseKind::mobility) {
    const double root = std::sqrt(1.0 + z * z);
    return {f * (root - z), f * (root + z)};
  }
  const double middle = 1.0 - 2.0 * z * z;
  const double half = 2.0 * z * std::sqrt(1.0 - z * z);
  if (kind == ResponseKind::receptance) return {f * std::sqrt(middle - half), f * std::sqrt(middle + half)};
  return {f / std::sqrt(middle + half), f / std::sqrt(middle - half)};
}

double without_window(double damping_ratio, double frequency_hz, double decay_per_s) {
  return damping_ratio - decay_per_s / (2.0 * std::numbers::pi * frequency_hz);
}

base::Answer<HalfPower> half_power(std::span<const double> magnitude, double line_hz, base::Interval near_hz,
                                   ResponseKind kind, double decay_per_s, double resolution_hz, double least_lines) {
  if (magnitude.size() < 5 || !(line_hz > 0.0)) {
    throw base::Error(base::ErrorKind::internal, "modal/half_power", "a peak needs at least five lines");
  }
  const Curve curve(magnitude, line_hz, kind);
  std::optional<std::size_t> peak;
  for (std::size_t k = 2; k + 2 < magnitude.size(); ++k) {
    if (near_hz.contains(curve.frequency(k)) && (!peak || magnitude[k] > magnitude[*peak])) peak = k;
  }
  const base::Refusal no_point{
      "no-half-power-point", "the response does not fall to 1/sqrt 2 of its peak on both sides of it",
      "read the damping from a curve fit, or strike where the mode stands free of its neighbours"};
  if (!peak || magnitude[*peak - 1] > magnitude[*peak] || magnitude[*peak + 1] > magnitude[*peak]) return no_point;

  HalfPower result;
  result.peak_frequency_hz = highest_between(curve, curve.frequency(*peak - 1), curve.frequency(*peak + 1));
  result.peak = curve(result.peak_frequency_hz);
  const double level = result.peak * std::numbers::sqrt2 / 2.0;
  const Descent below = descend(magnitude, curve, *peak, -1, result.peak_frequency_hz, level, near_hz);
  const Descent above = descend(magnitude, curve, *peak, +1, result.peak_frequency_hz, level, near_hz);
  if (!below.reached || !above.reached) return no_point;

  result.crossings_hz = {below.frequency, above.frequency};
  const double resolution = std::max(line_hz, resolution_hz);
  result.lines = result.crossings_hz.width() / resolution;
  if (result.lines < least_lines) {
    const double needed_s = least_lines / result.crossings_hz.width();
    return base::Refusal{"too-few-lines",
                         "the half-power bandwidth of " + base::rounded(result.crossings_hz.width()) +
                             " Hz is covered by " + base::rounded(result.lines, 2) + " lines of " +
                             base::rounded(resolution) + " Hz",
                         "record blocks of at least " + base::rounded(needed_s) + " s"};
  }
  result.system = from_half_power(below.frequency, above.frequency, kind);
  result.system.damping_ratio = without_window(result.system.damping_ratio, result.system.frequency_hz, decay_per_s);
  return result;
}

}  // namespace stillmass::modal
