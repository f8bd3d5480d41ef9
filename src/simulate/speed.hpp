#pragma once

#include <array>
#include <cstdint>

#include "stillmass/numeric/random.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

/// Angle of the shaft, rad, and its two derivatives.
struct Shaft {
  double angle = 0.0;
  double speed = 0.0;
  double acceleration = 0.0;
  bool powered = true;  ///< the motor is on
};

/// The shaft's motion in closed form. Steady: w = w0 (1 + wander * sum a_k sin(2 pi t / T_k + phase_k)), sum a_k = 1.
/// From `switch_off_s` on: dw/dt = -w^2 / (w0 T) - b, whose solution is w = c tan(phi - c (t - t0) / (w0 T)) with
/// c^2 = b w0 T, until it stands.
class ShaftMotion {
 public:
  static ShaftMotion steady(const Drive& drive, const numeric::Random& random, std::uint64_t stream);
  static ShaftMotion coastdown(const Drive& drive, double switch_off_s, const numeric::Random& random,
                               std::uint64_t stream);
  static ShaftMotion standstill();

  Shaft at(double time_s) const;
  double rated_speed() const { return rated_; }  ///< rad/s
  /// When the shaft stands, s; infinite for a steady one.
  double standstill_s() const;

 private:
  struct Sway {
    double amplitude;
    double rate;  ///< rad/s
    double phase;
  };
  Shaft powered_at(double time_s) const;

  double rated_ = 0.0;
  std::array<Sway, 3> sways_{};
  double switch_off_s_ = 0.0;
  Shaft at_switch_off_;
  double time_constant_ = 1.0;  ///< w0 T, rad
  double corner_speed_ = 1.0;   ///< c, rad/s: where friction equals the pump's torque
  bool stands_ = false;
};

}  // namespace stillmass::simulate
