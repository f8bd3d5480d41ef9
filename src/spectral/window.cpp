#include "stillmass/spectral/window.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>
#include <numeric>

#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

struct Named {
  Window window;
  std::string_view name;
};
constexpr std::array windows{Named{Window::rectangle, "rectangle"}, Named{Window::hann, "hann"},
                             Named{Window::hamming, "hamming"}, Named{Window::blackman_harris, "blackman-harris"},
                             Named{Window::flat_top, "flat-top"}};

double decibel(double amplitude_ratio) { return 20.0 * std::log10(std::abs(amplitude_ratio)); }

double width_at(Window window, double loss_db) {
  double inside = 0.0;
  double outside = lobe_bins(window);
  for (int i = 0; i < 60; ++i) {
    const double middle = 0.5 * (inside + outside);
    (decibel(transform(window, middle)) > -loss_db ? inside : outside) = middle;
  }
  return inside + outside;
}

double scallop_loss(Window window) {
  double least = 0.0;
  for (int i = 0; i <= 500; ++i) least = std::min(least, decibel(transform(window, 0.001 * i)));
  return -least;
}

double highest_side_lobe(Window window) {
  // The side lobes of all these windows fall after the first few, so 20 bins past the main lobe hold the highest.
  double highest = -400.0;
  const double from = lobe_bins(window);
  for (int i = 1; i < 20000; ++i) highest = std::max(highest, decibel(transform(window, from + 0.001 * i)));
  return highest;
}

}  // namespace

std::string_view name(Window window) {
  const auto found = std::find_if(windows.begin(), windows.end(), [=](const Named& n) { return n.window == window; });
  return found->name;
}

std::optional<Window> window_named(std::string_view name) {
  const auto found = std::find_if(windows.begin(), windows.end(), [=](const Named& n) { return n.name == name; });
  if (found == windows.end()) return std::nullopt;
  return found->window;
}

std::vector<double> samples(Window window, std::size_t n) {
  const auto a = coefficients(window);
  std::vector<double> w(n);
  for (std::size_t i = 0; i < n; ++i) {
    const double angle = 2.0 * std::numbers::pi * static_cast<double>(i) / static_cast<double>(n);
    double sign = 1.0;
    for (std::size_t k = 0; k < a.size(); ++k, sign = -sign)
      w[i] += sign * a[k] * std::cos(angle * static_cast<double>(k));
  }
  return w;
}

WindowFacts facts(Window window) {
  return {.noise_bandwidth_bins = noise_bandwidth_bins(samples(window, 1024)),
          .width_3db_bins = width_at(window, 3.0),
          .scallop_loss_db = scallop_loss(window),
          .side_lobe_db = highest_side_lobe(window)};
}

double lobe_bins(Window window) { return static_cast<double>(coefficients(window).size()); }

double noise_bandwidth_bins(std::span<const double> weights) {
  const double sum = std::accumulate(weights.begin(), weights.end(), 0.0);
  const double squares = std::inner_product(weights.begin(), weights.end(), weights.begin(), 0.0);
  return static_cast<double>(weights.size()) * squares / (sum * sum);
}

double overlap_correlation(std::span<const double> weights, std::size_t lag) {
  if (lag >= weights.size()) return 0.0;
  const auto late = weights.subspan(lag);
  return std::inner_product(late.begin(), late.end(), weights.begin(), 0.0) /
         std::inner_product(weights.begin(), weights.end(), weights.begin(), 0.0);
}

double peak_bias(Window window, double line_hz, double bandwidth_hz) {
  constexpr std::size_t steps = 1024;
  const auto w = samples(window, steps);
  const double h = 1.0 / static_cast<double>(steps);
  const double s = std::numbers::pi * bandwidth_hz / line_hz;  // decay over one block
  const double q = std::exp(-s * h);
  // exp times the correlation, taken as linear between steps, integrated exactly.
  double integral = 0.0;
  double here = 1.0;
  for (std::size_t j = 0; j < steps; ++j) {
    const double next = overlap_correlation(w, j + 1);
    const double from_here = here * (1.0 - q) + (next - here) * (1.0 - q - s * h * q) / (s * h);
    integral += std::exp(-s * h * static_cast<double>(j)) * from_here;
    here = next;
  }
  return integral - 1.0;
}

}  // namespace stillmass::spectral
