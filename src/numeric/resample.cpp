#include "stillmass/numeric/resample.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

constexpr std::size_t through = 6;  // samples that the polynomial passes through

struct Interpolated {
  double value = 0.0;
  double next_term = 0.0;
};

// Newton's form through the six samples from `first`, and the term that the nearest further sample would add.
Interpolated newton(std::span<const double> times, std::span<const double> values, std::size_t first, double at) {
  const std::size_t last = first + through - 1;
  const bool left_free = first > 0;
  const bool right_free = last + 1 < times.size();
  const bool take_left = left_free && (!right_free || at - times[first - 1] < times[last + 1] - at);

  std::array<double, through + 1> t{};
  std::array<double, through + 1> difference{};
  for (std::size_t i = 0; i <= through; ++i) {
    const std::size_t from = i < through ? first + i : (take_left ? first - 1 : last + 1);
    t[i] = times[from] - at;
    difference[i] = values[from];
  }
  for (std::size_t order = 1; order <= through; ++order) {
    for (std::size_t i = through; i >= order; --i) {
      difference[i] = (difference[i] - difference[i - 1]) / (t[i] - t[i - order]);
    }
  }
  Interpolated out;
  double product = 1.0;
  for (std::size_t i = 0; i < through; ++i) {
    out.value += difference[i] * product;
    product *= -t[i];
  }
  out.next_term = difference[through] * product;
  return out;
}

}  // namespace

Resampled to_even_grid(std::span<const double> times, std::span<const double> values, double start, double rate,
                       std::size_t count) {
  const std::size_t n = times.size();
  if (n <= through || values.size() != n || !(rate > 0.0)) {
    throw base::Error(base::ErrorKind::internal, "resampling", "fewer than seven samples, or no rate");
  }
  const double slack = 0.5 / rate;
  const double end = start + static_cast<double>(count > 0 ? count - 1 : 0) / rate;
  if (start < times.front() - slack || end > times.back() + slack) {
    throw base::Error(base::ErrorKind::internal, "resampling", "the grid reaches beyond the samples");
  }
  Resampled out;
  out.values.reserve(count);
  double square_sum = 0.0;
  for (std::size_t i = 0; i < count; ++i) {
    const double at = start + static_cast<double>(i) / rate;
    const auto right = static_cast<std::size_t>(std::upper_bound(times.begin(), times.end(), at) - times.begin());
    const std::size_t first = std::clamp<std::size_t>(right, through / 2, n - through / 2) - through / 2;
    const Interpolated point = newton(times, values, first, at);
    const double error = 2.0 * std::abs(point.next_term);
    out.values.push_back(point.value);
    out.error_max = std::max(out.error_max, error);
    square_sum += error * error;
  }
  if (count > 0) out.error_rms = std::sqrt(square_sum / static_cast<double>(count));
  return out;
}

}  // namespace stillmass::numeric
