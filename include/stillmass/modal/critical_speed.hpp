#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/mode.hpp"
#include "stillmass/rotation/sweep.hpp"

namespace stillmass::modal {

/// A speed at which an order meets a natural frequency. Speeds are in turns per second.
struct CriticalSpeed {
  std::size_t mode = 0;  ///< index of the mode
  double order = 1.0;
  base::Estimate speed;             ///< natural frequency / order, Hz
  double amplification_factor = 0;  ///< 1 / (2 z)
  /// Distance from the running speeds to it, relative to the nearer end of them; 0 inside; negative: the critical speed
  /// lies below. Absent without running speeds.
  std::optional<double> margin;
};

/// All meetings of orders (> 0) and modes up to `max_speed_hz` (turns per second), by speed.
std::vector<CriticalSpeed> critical_speeds(std::span<const Mode> modes, std::span<const double> orders,
                                           double max_speed_hz, std::optional<base::Interval> running_hz = {});

/// Amplification factor from a response peak over speed: Nc / (N2 - N1) at 1/sqrt 2 of the peak (API RP 684; from
/// memory).
double amplification_factor(double critical, double lower, double upper);

/// Separation margins, as fractions, that API 617 7th edition asks for (from memory): nothing under 2.5; below the
/// running range 0.17 (1 - 1 / (AF - 1.5)), above it 0.10 more.
struct RequiredMargin {
  double below = 0.0;  ///< critical speed below the running speeds
  double above = 0.0;
};
RequiredMargin required_margin(double amplification_factor);

/// The fastest sweep that loses no more than about 5 % of a resonance peak.
using rotation::sweep_rate_limit;
/// Finding `sweep_too_fast` where |rate| (Hz/s of the exciting frequency) exceeds that limit.
std::optional<base::Finding> sweep_check(const Mode& mode, double rate_hz_per_s);

}  // namespace stillmass::modal
