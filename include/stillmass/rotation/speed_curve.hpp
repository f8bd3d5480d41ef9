#pragma once

#include <optional>
#include <string_view>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/numeric/interpolate.hpp"
#include "stillmass/rotation/tacho.hpp"

namespace stillmass::rotation {

/// What the speed does over a recording. Steady: it stays within 2 %; run-up and coast-down: at least 80 % of its span
/// lies between its beginning and its end; varying: anything else (limits: common practice).
enum class Trend { steady, run_up, coast_down, varying };
std::string_view name(Trend trend);

/// Rotational speed against time, held as the monotone curve time(turns) through the pulses. Speeds in Hz (turns per
/// second), angles in turns from the first pulse, times in s from the start of the recording.
class SpeedCurve {
 public:
  /// Throws `Error` (internal) for fewer than two pulses.
  explicit SpeedCurve(const Pulses& pulses);

  base::Interval turns() const;
  base::Interval time_s() const;

  double time_at(double turn) const { return time_.value(turn); }
  double turn_at(double time) const { return time_.inverse(time); }
  /// Momentary speed from the slope of the curve; as jittery as the pulses.
  double speed_at_turn(double turn) const { return 1.0 / time_.slope(turn); }
  double speed_at(double time) const { return speed_at_turn(turn_at(time)); }
  /// Mean speed between two angles (mean over time), u from the pulses' time: f u_t sqrt 2 / (t2 - t1).
  base::Estimate mean_speed(double from_turn, double to_turn) const;
  /// df/dt in Hz/s: the second difference of the angle over +- half_width_s, (n(t+w) - 2 n(t) + n(t-w)) / w^2, exact
  /// for a constant rate. Near the ends the middle moves inwards. Absent where the curve is shorter than 4 turns.
  std::optional<double> sweep_rate(double time) const;

  /// Least and greatest speed, each a mean over one whole turn.
  base::Interval speed_range() const { return range_; }
  Trend trend() const { return trend_; }
  std::optional<double> pulse_time_u() const { return time_u_; }

 private:
  numeric::MonotoneCubic time_;  ///< time against turns
  std::optional<double> time_u_;
  base::Interval range_;
  Trend trend_ = Trend::steady;
};

}  // namespace stillmass::rotation
