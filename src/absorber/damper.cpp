#include "stillmass/absorber/damper.hpp"

#include <numbers>

namespace stillmass::absorber {

DamperDuty damper_duty(const modal::SprungMass& absorber, double travel_m, double f_hz) {
  DamperDuty duty;
  duty.damping_constant = absorber.damping_constant();
  duty.peak_velocity = 2.0 * std::numbers::pi * f_hz * travel_m;
  duty.peak_force = duty.damping_constant * duty.peak_velocity;
  duty.power_w = 0.5 * duty.peak_force * duty.peak_velocity;
  duty.loss_factor = 2.0 * absorber.damping_ratio;
  return duty;
}

double shear_plate_damping(double viscosity, double area_m2, double gap_m) { return 2.0 * viscosity * area_m2 / gap_m; }

}  // namespace stillmass::absorber
