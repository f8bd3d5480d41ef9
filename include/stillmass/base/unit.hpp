#pragma once

#include <optional>
#include <string_view>

namespace stillmass::base {

/// What a number measures. Inside the program every number is in the SI unit of its quantity.
enum class Quantity {
  ratio,         ///< dimensionless: damping ratio, mass ratio, order
  acceleration,  ///< m/s2
  velocity,      ///< m/s
  displacement,  ///< m
  force,         ///< N
  voltage,       ///< V
  pulse,         ///< tacho signal, any level
  frequency,     ///< Hz
  speed,         ///< rotational speed, Hz (turns per second)
  time,          ///< s
  mass,          ///< kg
  stiffness,     ///< N/m
  damping,       ///< N s/m
  angle,         ///< rad
  temperature,   ///< degrees Celsius
};

/// A unit of measure as people write it: SI value = written value * to_si.
struct Unit {
  std::string_view name;
  Quantity quantity = Quantity::ratio;
  double to_si = 1.0;
};

/// The unit of that name (g, m/s2, mm/s, m/s, in/s, um, mm, m, mil, N, lbf, V, 1, tacho, Hz, rpm, s, kg, N/m, N s/m,
/// deg, rad, ...), in the usual spellings (`m/s^2`, `µm`, `Volts`); nothing for a name that is not known.
/// Case matters where the trade makes it matter (`mm`, `Mm`), not otherwise.
std::optional<Unit> unit_named(std::string_view name);

/// The SI unit in which numbers of this quantity are held.
Unit si_unit(Quantity quantity);

/// The unit in which people at the machine read it: mm/s, um, g, rpm; else the SI unit.
Unit trade_unit(Quantity quantity);

/// True for acceleration, velocity and displacement.
bool is_motion(Quantity quantity);

/// Plain name: "acceleration", ...
std::string_view name(Quantity quantity);
std::optional<Quantity> quantity_named(std::string_view name);

/// How the strength of an oscillation is stated. For one sinusoid: peak = sqrt 2 rms, peak-to-peak = 2 peak.
enum class Detector { rms, peak, peak_to_peak };
std::string_view name(Detector detector);
std::optional<Detector> detector_named(std::string_view name);
/// Factor from the r.m.s. value of a sinusoid to this detector.
double from_rms(Detector detector);

/// Standard acceleration of gravity, m/s2 (CGPM 1901).
inline constexpr double standard_gravity = 9.80665;

}  // namespace stillmass::base
