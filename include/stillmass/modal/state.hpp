#pragma once

#include <optional>

#include "stillmass/base/finding.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

/// How far a mode measured on the stopped machine may lie from that of the running one: relative standard
/// uncertainties. Defaults: common practice.
struct StoppedShift {
  double frequency = 0.02;
  double damping = 0.3;
};

struct ShiftedMode {
  Mode mode;
  std::optional<base::Finding> finding;  ///< stopped_shift_assumed, where the shift was added
};

/// The mode for running design. A mode of state "stopped" gets the shift in quadrature on frequency and damping
/// (degrees of freedom after Welch-Satterthwaite, correlations thinned accordingly); any other is returned as it is.
ShiftedMode for_running_design(const Mode& mode, const StoppedShift& shift = {});

}  // namespace stillmass::modal
