#pragma once

#include <vector>

#include "stillmass/absorber/stock.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// A helical spring of round wire.
struct HelicalSpring {
  double wire_m = 0.0;  ///< diameter d of the wire
  double coil_m = 0.0;  ///< mean diameter D of the coils
  double active_coils = 0.0;
  double shear_modulus = 0.0;  ///< Pa
  double density = 0.0;        ///< kg/m3

  double index() const { return coil_m / wire_m; }
  double rate() const;     ///< G d^4 / (8 D^3 n), N/m
  double mass_kg() const;  ///< of the active coils: pi^2 d^2 D n rho / 4
  /// Shear stress in the wire for an axial force, curvature counted: K 8 F D / (pi d^3), Pa.
  double shear_stress(double force_n) const;
  /// First longitudinal natural frequency with both ends held: (1/2) sqrt(k / m), Hz. Source: Shigley sec. 10-8.
  double surge_frequency() const;
};

/// Wahl's curvature factor (4 C - 1)/(4 C - 4) + 0.615/C of spring index C > 1.
double wahl_factor(double index);

/// An absorber on `count` equal springs in parallel, preloaded against each other so that they never go slack.
struct SpringOption {
  std::string material;
  int count = 0;
  HelicalSpring spring;
  double solid_mass_kg = 0.0;  ///< of the mass itself: the absorber's less a third of the springs'
  double stress_pa = 0.0;      ///< shear amplitude at the design travel
  double endurance_factor = 0.0;
  double surge_hz = 0.0;
};

/// Spring options for an absorber, highest endurance factor first: 2, 4 or 8 springs, index 5 to 10, 3 to 12 active
/// coils, a surge frequency at least 5 times the absorber's, the endurance factor reached. A third of the springs'
/// mass is counted as moving.
std::vector<SpringOption> spring_options(const modal::SprungMass& absorber, double travel_m, const Stock& stock,
                                         double endurance_factor = 1.5, std::size_t at_most = 3);

}  // namespace stillmass::absorber
