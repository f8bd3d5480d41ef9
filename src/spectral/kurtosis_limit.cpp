#include "spectral/kurtosis_limit.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "stillmass/numeric/distribution.hpp"

namespace stillmass::spectral {

namespace {

/// Chance that more than half of n events of chance q happen.
double chance_of_most(double q, std::size_t n) {
  double sum = 0.0;
  for (std::size_t k = n / 2 + 1; k <= n; ++k) {
    const auto a = static_cast<double>(n), b = static_cast<double>(k);
    const double ways = std::lgamma(a + 1.0) - std::lgamma(b + 1.0) - std::lgamma(a - b + 1.0);
    sum += std::exp(ways + b * std::log(q) + (a - b) * std::log1p(-q));
  }
  return sum;
}

}  // namespace

std::vector<double> smoothed(std::span<const double> power) {
  constexpr std::size_t reach = 4;
  std::vector<double> result(power.size());
  std::array<double, 2 * reach + 1> around{};
  for (std::size_t k = 0; k < power.size(); ++k) {
    const std::size_t from = k - std::min(k, reach);
    const std::size_t to = std::min(k + reach + 1, power.size());
    const auto end = std::copy(power.begin() + static_cast<std::ptrdiff_t>(from),
                               power.begin() + static_cast<std::ptrdiff_t>(to), around.begin());
    const auto middle = around.begin() + (end - around.begin()) / 2;
    std::nth_element(around.begin(), middle, end);
    result[k] = *middle;
  }
  return result;
}

double samples_alike(std::span<const double> density, const BandFilter& filter) {
  ComplexFft fft(filter.samples());
  const auto values = fft.values();
  double total = 0.0;
  std::fill(values.begin(), values.end(), std::complex<double>{});
  for (std::size_t j = 0; j < density.size(); ++j) {
    const double power = density[j] * filter.gains()[j] * filter.gains()[j];
    values[j] = power;
    total += power;
  }
  if (!(total > 0.0)) return 1.0;
  fft.run();
  double sum = 0.0;
  for (const std::complex<double>& v : values) {
    const double rho_squared = std::norm(v) / (total * total);
    sum += rho_squared * rho_squared;
  }
  return std::max(sum, 1.0);
}

double kurtosis_limit(double independent, std::size_t stretches, double chance) {
  double low = 1e-300, high = 0.5;
  for (int i = 0; i < 200; ++i) {
    const double middle = std::sqrt(low * high);
    (chance_of_most(middle, stretches) < chance ? low : high) = middle;
  }
  const double each = std::clamp(high, 1e-12, 0.4);
  const double n = std::max(independent, 8.0);
  const double skewness = 10.0 / std::sqrt(n);
  const double dof = 8.0 / (skewness * skewness);
  const double z = (numeric::chi_square_quantile(1.0 - each, dof) - dof) / std::sqrt(2.0 * dof);
  return 2.0 / std::sqrt(n) * z;
}

}  // namespace stillmass::spectral
