#include "spectral/window_transform.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

namespace stillmass::spectral {

namespace {

constexpr std::array rectangle{1.0};
constexpr std::array hann{0.5, 0.5};
constexpr std::array hamming{0.54, 0.46};
// Harris 1978; digits as in Heinzel, Ruediger, Schilling 2002.
constexpr std::array blackman_harris{0.35875, 0.48829, 0.14128, 0.01168};
// Heinzel 2002, appendix D, five terms, as SciPy's `flattop` has them. The family of ISO 18431-2 with more digits.
constexpr std::array flat_top{0.21557895, 0.41663158, 0.277263158, 0.083578947, 0.006947368};

double sinc(double x) { return x == 0.0 ? 1.0 : std::sin(std::numbers::pi * x) / (std::numbers::pi * x); }

/// Fourier coefficient of the centred window at +-k turns a block.
double harmonic(std::span<const double> a, int k) {
  const auto size = static_cast<int>(a.size());
  const int index = std::abs(k);
  if (index >= size) return 0.0;
  return index == 0 ? a[0] : 0.5 * a[static_cast<std::size_t>(index)];
}

double squared_harmonic(std::span<const double> a, int m) {
  const auto size = static_cast<int>(a.size());
  double sum = 0.0;
  for (int k = 1 - size; k < size; ++k) sum += harmonic(a, k) * harmonic(a, m - k);
  return sum;
}

}  // namespace

std::span<const double> coefficients(Window window) {
  switch (window) {
    case Window::rectangle:
      return rectangle;
    case Window::hann:
      return hann;
    case Window::hamming:
      return hamming;
    case Window::blackman_harris:
      return blackman_harris;
    case Window::flat_top:
      return flat_top;
  }
  return rectangle;
}

double transform(Window window, double x) {
  const auto a = coefficients(window);
  double sum = a[0] * sinc(x);
  for (std::size_t k = 1; k < a.size(); ++k) {
    const auto shift = static_cast<double>(k);
    sum += 0.5 * a[k] * (sinc(x - shift) + sinc(x + shift));
  }
  return sum / a[0];
}

double transform_envelope(Window window, double x) {
  const auto a = coefficients(window);
  const auto without_sine = [&](double at) {
    double sum = a[0] / at;
    double sign = -1.0;
    for (std::size_t k = 1; k < a.size(); ++k, sign = -sign) {
      const auto shift = static_cast<double>(k);
      sum += sign * 0.5 * a[k] * (1.0 / (at - shift) + 1.0 / (at + shift));
    }
    return std::abs(sum) / (std::numbers::pi * a[0]);
  };
  const double from_lobe = std::max(std::abs(x), static_cast<double>(a.size()));
  return std::max({without_sine(from_lobe - 0.5), without_sine(from_lobe), without_sine(from_lobe + 0.5)});
}

double line_correlation(Window window, std::size_t m) {
  const auto a = coefficients(window);
  if (m > 2 * a.size()) return 0.0;
  return squared_harmonic(a, static_cast<int>(m)) / squared_harmonic(a, 0);
}

}  // namespace stillmass::spectral
