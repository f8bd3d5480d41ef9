#include "stillmass/rotation/sweep.hpp"

#include <cmath>

namespace stillmass::rotation {

double sweep_parameter(double frequency_hz, double damping_ratio, double rate_hz_per_s) {
  const double bandwidth = 2.0 * damping_ratio * frequency_hz;
  return std::abs(rate_hz_per_s) / (bandwidth * bandwidth);
}

double swept_peak_fraction(double eta) { return eta > 0.0 ? 1.0 - std::exp(-2.86 * std::pow(eta, -0.445)) : 1.0; }

double undamped_passage(double frequency_hz, double rate_hz_per_s) {
  return 3.67 * frequency_hz / std::sqrt(std::abs(rate_hz_per_s));
}

double sweep_rate_limit(double frequency_hz, double damping_ratio) {
  const double bandwidth = 2.0 * damping_ratio * frequency_hz;
  return 54.0 / 60.0 * bandwidth * bandwidth;
}

double smear_hz(double order, double rate_hz_per_s, double block_s) {
  return order * std::abs(rate_hz_per_s) * block_s;
}

}  // namespace stillmass::rotation
