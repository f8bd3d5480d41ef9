#pragma once

#include <optional>

#include "stillmass/base/estimate.hpp"
#include "stillmass/machine/description.hpp"

namespace stillmass::tests {

inline base::Estimate hertz(double value, std::optional<double> u = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  out.quantity = base::Quantity::frequency;
  return out;
}

/// 2960 r/min on 50 Hz, six vanes.
inline machine::Machine two_pole_pump() {
  machine::Machine out;
  out.kind = machine::MachineKind::pump;
  out.speed_hz = base::Interval{2960.0 / 60.0, 2960.0 / 60.0};
  out.line_frequency_hz = 50.0;
  out.motor_poles = 2;
  out.vanes = 6;
  return out;
}

}  // namespace stillmass::tests
