#pragma once

#include <vector>

#include "stillmass/absorber/stock.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// A flat blade, clamped at its root, free at its tip (Euler-Bernoulli; length over thickness above about 10).
struct Blade {
  double length_m = 0.0;  ///< free length
  double width_m = 0.0;
  double thickness_m = 0.0;
  double youngs_modulus = 0.0;  ///< Pa
  double density = 0.0;         ///< kg/m3

  double mass_kg() const { return length_m * width_m * thickness_m * density; }
  double bending_stiffness() const;  ///< E I, N m2
  double tip_stiffness() const;      ///< 3 E I / L^3, N/m
  /// Root bending stress for a tip deflection: 3 E h y / (2 L^2), Pa.
  double root_stress(double tip_deflection_m) const;
  /// First natural frequency with a point mass at the tip, by (1/2 pi) sqrt(3 E I / (L^3 (M + 33/140 m))), Hz. High by
  /// 1.5 % without a tip mass, by 0.05 % where tip and blade weigh the same. Source: Rayleigh; Blevins.
  double frequency(double tip_mass_kg) const;
};

/// (beta L)^2 of the n-th bending mode (n >= 1) of a cantilever with a point mass of `mass_ratio` = tip mass over blade
/// mass at its tip: the n-th root of 1 + cos x cosh x + R x (cos x sinh x - sin x cosh x) = 0, squared. The natural
/// frequency is (beta L)^2 sqrt(E I / (m L^3)) / 2 pi.
double cantilever_root_squared(int n, double mass_ratio);

/// The exact n-th natural frequency of the blade with a point mass at its tip, Hz.
double blade_frequency(const Blade& blade, double tip_mass_kg, int n = 1);

/// An absorber made of `count` equal blades side by side or back to back, each with its share of the mass at its tip.
struct BladeOption {
  std::string material;
  int count = 0;
  Blade blade;                    ///< of one
  double tip_mass_kg = 0.0;       ///< on each tip, clamps and screws included
  double stress_pa = 0.0;         ///< at the root, amplitude at the design travel
  double weight_stress_pa = 0.0;  ///< at the root from the tip's weight, where the blade bends vertically
  double endurance_factor = 0.0;  ///< endurance limit of the material over `stress_pa`
  double sag_m = 0.0;             ///< tip deflection under gravity, where the blade bends vertically
  double frequency_per_m = 0.0;   ///< change of frequency with free length, Hz/m (negative)
  double second_mode_hz = 0.0;    ///< first overtone of the blade
};

/// Blade options for an absorber, highest endurance factor (up to 3) first, then shortest: for each flat bar and 1, 2
/// or 4 blades the free length that gives the frequency exactly, the tip taken for a point mass. Kept where the length
/// is 10 to 200 thicknesses, at most 0.8 m and at least 2.5 times the edge of a steel cube of the tip's mass (its
/// rotary inertia then lowers the frequency by less than 3 %, which tuning takes up), the tip mass is at least half of
/// its share, and the endurance factor is reached.
std::vector<BladeOption> blade_options(const modal::SprungMass& absorber, double travel_m, const Stock& stock,
                                       double endurance_factor = 1.5, std::size_t at_most = 5);

}  // namespace stillmass::absorber
