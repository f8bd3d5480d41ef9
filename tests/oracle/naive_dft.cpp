#include "oracle/naive_dft.hpp"

#include <cmath>
#include <cstddef>
#include <numbers>

namespace stillmass::tests {

std::vector<std::complex<double>> naive_dft(std::span<const double> x) {
  const std::size_t n = x.size();
  std::vector<std::complex<double>> lines;
  for (std::size_t k = 0; k <= n / 2; ++k) {
    std::complex<long double> sum;
    for (std::size_t t = 0; t < n; ++t) {
      const long double turns = static_cast<long double>((k * t) % n) / static_cast<long double>(n);
      const long double angle = -2.0L * std::numbers::pi_v<long double> * turns;
      sum += std::complex<long double>(std::cos(angle), std::sin(angle)) * static_cast<long double>(x[t]);
    }
    lines.emplace_back(static_cast<double>(sum.real()), static_cast<double>(sum.imag()));
  }
  return lines;
}

std::vector<double> naive_density(std::span<const double> x, std::span<const double> weights, double rate_hz) {
  const std::size_t n = x.size();
  std::vector<double> weighted(n);
  double norm = 0.0;
  for (std::size_t t = 0; t < n; ++t) {
    weighted[t] = weights[t] * x[t];
    norm += weights[t] * weights[t];
  }
  std::vector<double> density;
  for (const auto& line : naive_dft(weighted)) density.push_back(2.0 * std::norm(line) / (rate_hz * norm));
  density.front() *= 0.5;
  if (n % 2 == 0) density.back() *= 0.5;
  return density;
}

}  // namespace stillmass::tests
