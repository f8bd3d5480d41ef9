#include "rotation/coast_knee.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

#include "rotation/base_band.hpp"

namespace stillmass::rotation {
namespace {

using base::Interval;

constexpr double knee_from = 0.99;
constexpr double knee_to = 0.97;

}  // namespace

double turn_speed(const SpeedCurve& curve, double turn) {
  const Interval all = curve.turns();
  const double from = std::clamp(turn - 0.5, all.lo, std::max(all.lo, all.hi - 1.0));
  return curve.mean_speed(from, std::min(all.hi, from + 1.0)).value;
}

std::optional<Knee> knee_of(const SpeedCurve& curve, Interval time_s) {
  const double from = std::ceil(curve.turn_at(std::clamp(time_s.lo, curve.time_s().lo, curve.time_s().hi)));
  const double to = std::floor(curve.turn_at(std::clamp(time_s.hi, curve.time_s().lo, curve.time_s().hi)));
  double fastest = 0.0;
  for (double turn = from; turn <= to; turn += 1.0) fastest = std::max(fastest, turn_speed(curve, turn));
  std::vector<double> steady;
  for (double turn = from; turn <= to; turn += 1.0) {
    const double speed = turn_speed(curve, turn);
    if (speed >= knee_from * fastest) steady.push_back(speed);
  }
  const double before = middle_of(std::move(steady));
  const auto last_above = [&](double share) {
    for (double turn = to; turn >= from; turn -= 1.0) {
      const double speed = turn_speed(curve, turn);
      if (speed < share * before) continue;
      if (turn == to) return std::optional<double>{};
      const double next = turn_speed(curve, turn + 1.0);
      const double part = (speed - share * before) / std::max(1e-12, speed - next);
      return std::optional(curve.time_at(turn) + part * (curve.time_at(turn + 1.0) - curve.time_at(turn)));
    }
    return std::optional<double>{};
  };
  const auto first = last_above(knee_from);
  const auto second = last_above(knee_to);
  if (!first || !second) return {};
  const double back = (1.0 - knee_from) / (knee_from - knee_to);
  return Knee{*first - back * (*second - *first), before, *first};
}

}  // namespace stillmass::rotation
