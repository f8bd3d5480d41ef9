#pragma once

#include <optional>

#include "stillmass/base/interval.hpp"
#include "stillmass/rotation/speed_curve.hpp"

namespace stillmass::rotation {

/// When a coast-down began and from which speed.
struct Knee {
  double time_s = 0.0;
  double speed_hz = 0.0;
  double fallen_s = 0.0;  ///< when the speed had fallen by 1 %: seen, not extrapolated
};

/// Where the speed leaves its level for good: a straight line through 99 and 97 % of it, back to the level. Absent
/// where it does not fall that far within the time.
std::optional<Knee> knee_of(const SpeedCurve& curve, base::Interval time_s);

/// Mean speed over the turn around that angle, Hz.
double turn_speed(const SpeedCurve& curve, double turn);

}  // namespace stillmass::rotation
