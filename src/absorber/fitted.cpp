#include "stillmass/absorber/fitted.hpp"

#include <cmath>
#include <numbers>

namespace stillmass::absorber {

base::Answer<FittedAbsorber> fitted_from_line(const modal::OneMode& machine, double mass_kg, double f_hz,
                                              std::complex<double> after_over_before, double wanted_hz) {
  constexpr double least_change = 0.02;
  if (std::abs(after_over_before - 1.0) < least_change || std::abs(after_over_before) == 0.0) {
    return base::Refusal{"no-change", "the forcing line is the same before and after within 2 %",
                         "measure at a speed nearer to the absorber's frequency, or the absorber alone on a clamp"};
  }
  const double w = 2.0 * std::numbers::pi * f_hz;
  const double inertia = mass_kg * w * w;
  const auto d = (1.0 / after_over_before - 1.0) / machine.receptance(f_hz);
  const auto spring = d * inertia / (d + inertia);
  if (!(spring.real() > 0.0)) {
    return base::Refusal{"not-an-absorber", "the change of the forcing line does not fit a mass on a spring",
                         "repeat the measurement before at the same speed and load, with the phase to a pulse"};
  }
  FittedAbsorber fitted;
  fitted.frequency_hz = std::sqrt(spring.real() / mass_kg) / (2.0 * std::numbers::pi);
  fitted.damping_ratio = spring.imag() / w / (2.0 * std::sqrt(spring.real() * mass_kg));
  fitted.retune = wanted_hz / fitted.frequency_hz - 1.0;
  return fitted;
}

base::Answer<FittedAbsorber> fitted_from_splits(double f1_hz, std::array<double, 2> splits_hz, double wanted_hz) {
  if (!(splits_hz[0] < f1_hz && f1_hz < splits_hz[1])) {
    return base::Refusal{"not-split", "the natural frequency of the machine does not lie between the two frequencies",
                         "hit the machine with the absorber free and with it blocked, and read both"};
  }
  FittedAbsorber fitted;
  fitted.frequency_hz = splits_hz[0] * splits_hz[1] / f1_hz;
  fitted.retune = wanted_hz / fitted.frequency_hz - 1.0;
  return fitted;
}

Achieved achieved(const base::Estimate& before, const base::Estimate& after,
                  const std::optional<base::Estimate>& predicted) {
  Achieved result;
  result.ratio = after.value / before.value;
  if (!predicted) return result;
  result.predicted_ratio = predicted->value / before.value;
  if (predicted->u && after.u) {
    result.deviation = (after.value - predicted->value) / std::hypot(*predicted->u, *after.u);
  }
  return result;
}

}  // namespace stillmass::absorber
