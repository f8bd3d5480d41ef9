#include <algorithm>
#include <cmath>
#include <complex>

#include "stillmass/machine/diagnosis.hpp"

namespace stillmass::machine {

double amplification(double frequency_hz, double natural_hz, double damping_ratio) {
  const double r = frequency_hz / natural_hz;
  return 1.0 / std::abs(std::complex<double>(1.0 - r * r, 2.0 * damping_ratio * r));
}

base::Interval amplification_range(double frequency_hz, const modal::Mode& mode) {
  const double natural = mode.frequency.value;
  const double zeta = mode.damping_ratio.value;
  const double reach = 2.0 * mode.frequency.u.value_or(0.0);
  const base::Interval natural_range{std::max(1e-3 * natural, natural - reach), natural + reach};
  const double at_lo = amplification(frequency_hz, natural_range.lo, zeta);
  const double at_hi = amplification(frequency_hz, natural_range.hi, zeta);
  // Highest where the forcing frequency is natural * sqrt(1 - 2 zeta^2), if the mode can be there.
  const double worst = frequency_hz / std::sqrt(std::max(0.01, 1.0 - 2.0 * zeta * zeta));
  const double at_worst = amplification(frequency_hz, natural_range.clamped(worst), zeta);
  return {std::min(at_lo, at_hi), std::max({at_lo, at_hi, at_worst})};
}

}  // namespace stillmass::machine
