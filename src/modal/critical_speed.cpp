#include "stillmass/modal/critical_speed.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::modal {
namespace {

double margin_to(double speed, base::Interval running) {
  if (speed < running.lo) return (speed - running.lo) / running.lo;
  if (speed > running.hi) return (speed - running.hi) / running.hi;
  return 0.0;
}

}  // namespace

std::vector<CriticalSpeed> critical_speeds(std::span<const Mode> modes, std::span<const double> orders,
                                           double max_speed_hz, std::optional<base::Interval> running_hz) {
  std::vector<CriticalSpeed> speeds;
  for (std::size_t m = 0; m < modes.size(); ++m) {
    for (const double order : orders) {
      if (!(order > 0.0)) throw base::Error(base::ErrorKind::internal, "modal/critical_speed", "an order must be > 0");
      base::Estimate speed = modes[m].frequency;
      speed.value /= order;
      if (speed.u) *speed.u /= order;
      speed.quantity = base::Quantity::speed;
      if (speed.value > max_speed_hz) continue;
      CriticalSpeed critical{m, order, speed, 0.5 / modes[m].damping_ratio.value, {}};
      if (running_hz) critical.margin = margin_to(speed.value, *running_hz);
      speeds.push_back(critical);
    }
  }
  std::ranges::stable_sort(speeds, {}, [](const CriticalSpeed& c) { return c.speed.value; });
  return speeds;
}

double amplification_factor(double critical, double lower, double upper) {
  if (!(upper > lower)) throw base::Error(base::ErrorKind::internal, "modal/critical_speed", "the speeds do not rise");
  return critical / (upper - lower);
}

RequiredMargin required_margin(double amplification_factor) {
  if (amplification_factor < 2.5) return {};
  const double below = 0.17 * (1.0 - 1.0 / (amplification_factor - 1.5));
  return {below, below + 0.10};
}

std::optional<base::Finding> sweep_check(const Mode& mode, double rate_hz_per_s) {
  const double limit = sweep_rate_limit(mode.frequency.value, mode.damping_ratio.value);
  if (std::abs(rate_hz_per_s) <= limit) return std::nullopt;
  return base::Finding{base::Code::sweep_too_fast,
                       "the excitation passed " + base::rounded(mode.frequency.value, 4) + " Hz at " +
                           base::rounded(std::abs(rate_hz_per_s)) + " Hz/s; up to " + base::rounded(limit) +
                           " Hz/s the peak loses no more than 5 %",
                       {},
                       {},
                       {},
                       base::Strength::fair,
                       {}};
}

}  // namespace stillmass::modal
