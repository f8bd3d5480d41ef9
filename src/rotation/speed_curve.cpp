#include "stillmass/rotation/speed_curve.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

namespace stillmass::rotation {
namespace {

numeric::MonotoneCubic time_against_turns(const Pulses& pulses) {
  if (pulses.time_s.size() < 2) throw base::Error(base::ErrorKind::internal, "speed", "fewer than two pulses");
  return numeric::MonotoneCubic(pulses.turns, pulses.time_s);
}

}  // namespace

std::string_view name(Trend trend) {
  switch (trend) {
    case Trend::steady:
      return "steady";
    case Trend::run_up:
      return "run-up";
    case Trend::coast_down:
      return "coast-down";
    case Trend::varying:
      return "varying";
  }
  return "";
}

SpeedCurve::SpeedCurve(const Pulses& pulses) : time_(time_against_turns(pulses)), time_u_(pulses.time_u) {
  const auto& turn = pulses.turns;
  const auto& time = pulses.time_s;
  const double whole = std::min(1.0, turn.back() - turn.front());
  range_ = {1e300, 0.0};
  for (std::size_t from = 0, to = 0; from < turn.size(); ++from) {
    while (to < turn.size() && turn[to] - turn[from] < whole - 1e-9) ++to;
    if (to == turn.size()) break;
    const double speed = (turn[to] - turn[from]) / (time[to] - time[from]);
    range_ = {std::min(range_.lo, speed), std::max(range_.hi, speed)};
  }
  const double end = std::max(whole, 0.02 * (turn.back() - turn.front()));
  const double rise =
      mean_speed(turn.back() - end, turn.back()).value - mean_speed(turn.front(), turn.front() + end).value;
  if (range_.width() <= 0.02 * range_.middle()) {
    trend_ = Trend::steady;
  } else if (std::abs(rise) < 0.8 * range_.width()) {
    trend_ = Trend::varying;
  } else {
    trend_ = rise > 0.0 ? Trend::run_up : Trend::coast_down;
  }
}

base::Interval SpeedCurve::turns() const { return {time_.x().front(), time_.x().back()}; }
base::Interval SpeedCurve::time_s() const { return {time_.y().front(), time_.y().back()}; }

base::Estimate SpeedCurve::mean_speed(double from_turn, double to_turn) const {
  const double elapsed = time_at(to_turn) - time_at(from_turn);
  base::Estimate speed;
  speed.quantity = base::Quantity::speed;
  speed.value = (to_turn - from_turn) / elapsed;
  if (time_u_) speed.u = speed.value * *time_u_ * std::numbers::sqrt2 / elapsed;
  return speed;
}

std::optional<double> SpeedCurve::sweep_rate(double time) const {
  const base::Interval all = time_s();
  if (turns().width() < 4.0) return {};
  const double speed = speed_at(all.clamped(time));
  const double half = std::min(0.5 * all.width(), std::max(4.0 / speed, 0.25));
  const double middle = base::Interval{all.lo + half, std::max(all.lo + half, all.hi - half)}.clamped(time);
  return (turn_at(middle + half) - 2.0 * turn_at(middle) + turn_at(middle - half)) / (half * half);
}

}  // namespace stillmass::rotation
