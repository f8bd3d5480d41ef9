#include "simulate/speed.hpp"

#include <cmath>
#include <limits>
#include <numbers>

namespace stillmass::simulate {
namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;
// Load and level of a pump change slowly: shares and periods of the sway, common practice.
constexpr std::array<double, 3> shares{0.5, 0.3, 0.2};
constexpr std::array<double, 3> periods_s{31.0, 17.0, 7.3};

}  // namespace

ShaftMotion ShaftMotion::steady(const Drive& drive, const numeric::Random& random, std::uint64_t stream) {
  ShaftMotion motion;
  motion.rated_ = two_pi * drive.speed_hz;
  motion.switch_off_s_ = std::numeric_limits<double>::infinity();
  for (std::uint32_t k = 0; k < shares.size(); ++k) {
    motion.sways_[k] = {drive.wander * shares[k], two_pi / periods_s[k], two_pi * random.uniform(stream, k)};
  }
  return motion;
}

ShaftMotion ShaftMotion::coastdown(const Drive& drive, double switch_off_s, const numeric::Random& random,
                                   std::uint64_t stream) {
  ShaftMotion motion = steady(drive, random, stream);
  motion.switch_off_s_ = switch_off_s;
  motion.at_switch_off_ = motion.powered_at(switch_off_s);
  motion.time_constant_ = motion.rated_ * drive.coast_time_s;
  motion.corner_speed_ = std::sqrt(two_pi * drive.friction_hz_per_s * motion.time_constant_);
  return motion;
}

ShaftMotion ShaftMotion::standstill() {
  ShaftMotion motion;
  motion.rated_ = 1.0;
  motion.stands_ = true;
  return motion;
}

double ShaftMotion::standstill_s() const {
  if (std::isinf(switch_off_s_)) return switch_off_s_;
  return switch_off_s_ + std::atan(at_switch_off_.speed / corner_speed_) * time_constant_ / corner_speed_;
}

Shaft ShaftMotion::powered_at(double time_s) const {
  Shaft shaft{rated_ * time_s, rated_, 0.0, true};
  for (const Sway& sway : sways_) {
    if (sway.amplitude == 0.0) continue;
    const double s = std::sin(sway.rate * time_s + sway.phase);
    const double c = std::cos(sway.rate * time_s + sway.phase);
    shaft.angle += rated_ * sway.amplitude * (std::cos(sway.phase) - c) / sway.rate;
    shaft.speed += rated_ * sway.amplitude * s;
    shaft.acceleration += rated_ * sway.amplitude * sway.rate * c;
  }
  return shaft;
}

Shaft ShaftMotion::at(double time_s) const {
  if (stands_) return {0.0, 0.0, 0.0, false};
  if (time_s < switch_off_s_) return powered_at(time_s);
  const double phi = std::atan(at_switch_off_.speed / corner_speed_);
  const double turn = phi - corner_speed_ * (time_s - switch_off_s_) / time_constant_;
  if (turn <= 0.0) return {at_switch_off_.angle - time_constant_ * std::log(std::cos(phi)), 0.0, 0.0, false};
  const double speed = corner_speed_ * std::tan(turn);
  return {at_switch_off_.angle + time_constant_ * std::log(std::cos(turn) / std::cos(phi)), speed,
          -(speed * speed + corner_speed_ * corner_speed_) / time_constant_, false};
}

}  // namespace stillmass::simulate
