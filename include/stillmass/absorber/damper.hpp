#pragma once

#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// What a viscous damper between absorber mass and machine must bear at a given travel, frequency and absorber.
struct DamperDuty {
  double damping_constant = 0.0;  ///< c, N s/m
  double peak_velocity = 0.0;     ///< w z, m/s
  double peak_force = 0.0;        ///< c w z, N
  double power_w = 0.0;           ///< heat: c (w z)^2 / 2
  double loss_factor = 0.0;       ///< of a rubber or viscoelastic spring that damps as much at the absorber's own
                                  ///< frequency: 2 za
};
/// travel_m: peak relative displacement z at f_hz.
DamperDuty damper_duty(const modal::SprungMass& absorber, double travel_m, double f_hz);

/// Damping constant of a plate that slides in a fluid film on both sides: c = 2 mu A / gap, N s/m (Couette flow;
/// edges neglected). viscosity in Pa s, area of one side in m2, gap on each side in m.
double shear_plate_damping(double viscosity, double area_m2, double gap_m);

}  // namespace stillmass::absorber
