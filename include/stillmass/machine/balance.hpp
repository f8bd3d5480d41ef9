#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/machine/description.hpp"

namespace stillmass::machine {

/// Balance quality grade G of ISO 21940-11 (formerly ISO 1940-1): G = e_per w. Grades are named in mm/s; here m/s.
struct BalanceGrade {
  std::string name;    ///< "G 6.3"
  double grade = 0.0;  ///< m/s
  std::string rotors;  ///< for which rotors
  std::vector<MachineKind> kinds;
  std::string source;
};
std::vector<BalanceGrade> balance_grades();
/// The usual grade for that kind of machine; absent where the table has none.
std::optional<BalanceGrade> usual_grade(MachineKind kind);

/// e_per = G / (2 pi n): permissible distance of the centre of mass, m. grade in m/s, speed n in Hz, > 0.
double permissible_eccentricity(double grade, double speed_hz);
/// U_per = e_per m, kg m.
double permissible_unbalance(double grade, double rotor_mass_kg, double speed_hz);

/// Share of two planes in U_per where the centre of mass lies between the bearings.
struct PlaneUnbalance {
  double a = 0.0;  ///< kg m at bearing A
  double b = 0.0;
};
/// Distances of the centre of mass from bearings A and B, m, > 0: U_a = U l_b / (l_a + l_b).
PlaneUnbalance split_unbalance(double unbalance, double to_a_m, double to_b_m);

/// Centrifugal force of an unbalance U at speed n: U (2 pi n)^2, N.
double unbalance_force(double unbalance, double speed_hz);

}  // namespace stillmass::machine
