#include "stillmass/spectral/quantity.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

#include "spectral/strong_lines.hpp"

namespace stillmass::spectral {

namespace {

using base::Quantity;

/// Integrations from acceleration.
std::optional<int> depth(Quantity quantity) {
  switch (quantity) {
    case Quantity::acceleration:
      return 0;
    case Quantity::velocity:
      return 1;
    case Quantity::displacement:
      return 2;
    default:
      return std::nullopt;
  }
}

int integrations_or_throw(Quantity from, Quantity to) {
  const auto n = integrations_between(from, to);
  if (!n) {
    throw base::usage_error({}, fmt::format("{} cannot be shown as {}", base::name(from), base::name(to)),
                            "only acceleration, velocity and displacement follow from one another");
  }
  return *n;
}

}  // namespace

std::optional<int> integrations_between(Quantity from, Quantity to) {
  if (from == to) return 0;
  const auto a = depth(from);
  const auto b = depth(to);
  if (!a || !b) return std::nullopt;
  return *b - *a;
}

std::complex<double> integration_factor(int integrations, double frequency_hz) {
  const double omega = 2.0 * std::numbers::pi * frequency_hz;
  std::complex<double> factor = 1.0;
  const std::complex<double> step =
      integrations > 0 ? std::complex<double>(0.0, -1.0 / omega) : std::complex<double>(0.0, omega);
  for (int i = 0; i < std::abs(integrations); ++i) factor *= step;
  return factor;
}

double least_low_limit_hz(const Spectrum& spectrum) { return lobe_bins(spectrum.window) * spectrum.line_hz; }

Spectrum as_quantity(const Spectrum& spectrum, Quantity to, double low_limit_hz) {
  const int n = integrations_or_throw(spectrum.quantity, to);
  if (n == 0) return spectrum;
  Spectrum result = spectrum;
  result.quantity = to;
  result.integrations += n;
  if (spectrum.integrations == 0) result.strong_lines = strong_lines(spectrum);
  if (result.integrations == 0) result.strong_lines.clear();
  if (result.integrations > 0) {
    const double limit = std::max(low_limit_hz, least_low_limit_hz(spectrum));
    const auto line = static_cast<std::size_t>(std::ceil(limit / spectrum.line_hz - 1e-9));
    result.first_line = std::clamp(line, spectrum.first_line, spectrum.density.size());
  }
  for (std::size_t k = 0; k < result.density.size(); ++k) {
    const bool is_given = k >= result.first_line && (k > 0 || n < 0);
    result.density[k] *= is_given ? std::norm(integration_factor(n, spectrum.frequency(k))) : 0.0;
  }
  return result;
}

FrequencyResponse as_quantity(const FrequencyResponse& response, Quantity output) {
  const int n = integrations_or_throw(response.output_quantity, output);
  if (n == 0) return response;
  FrequencyResponse result = response;
  result.output_quantity = output;
  for (std::size_t k = 0; k < result.h1.size(); ++k) {
    const auto factor = k > 0 || n < 0 ? integration_factor(n, response.frequency(k)) : 0.0;
    result.h1[k] *= factor;
    result.h2[k] *= factor;
  }
  return result;
}

}  // namespace stillmass::spectral
