#include "stillmass/machine/balance.hpp"

#include <algorithm>
#include <array>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/base/tables.hpp"

namespace stillmass::machine {
namespace {

using base::KeyType;

constexpr auto keys = std::to_array<base::Key>({
    {"row", KeyType::tables, "", true, "", "one grade", "", {}},
    {"row.name", KeyType::text, "", true, "", "name of the grade", "", {}},
    {"row.grade_mm_s", KeyType::number, "mm/s", true, "", "eccentricity times angular speed", "", {0.1, 10000}},
    {"row.rotors", KeyType::text, "", true, "", "rotors it is meant for", "", {}},
    {"row.kinds", KeyType::texts, "", false, "", "kinds of machine", "pump|fan|motor|general", {}},
    {"row.source", KeyType::text, "", true, "", "where the numbers come from", "", {}},
});

double angular_speed(double speed_hz) {
  if (!(speed_hz > 0.0)) throw base::Error(base::ErrorKind::internal, "balance", "the speed must be above 0");
  return 2.0 * std::numbers::pi * speed_hz;
}

}  // namespace

std::vector<BalanceGrade> balance_grades() {
  std::vector<BalanceGrade> out;
  for (const base::Settings::Table& row : base::table_rows("balance.toml", keys)) {
    BalanceGrade& grade = out.emplace_back();
    grade.name = *row.text("name");
    grade.grade = *row.number("grade_mm_s") / 1000.0;
    grade.rotors = *row.text("rotors");
    for (const std::string& kind : row.texts("kinds")) grade.kinds.push_back(*kind_named(kind));
    grade.source = *row.text("source");
  }
  return out;
}

std::optional<BalanceGrade> usual_grade(MachineKind kind) {
  for (BalanceGrade& grade : balance_grades()) {
    if (std::find(grade.kinds.begin(), grade.kinds.end(), kind) != grade.kinds.end()) return std::move(grade);
  }
  return {};
}

double permissible_eccentricity(double grade, double speed_hz) { return grade / angular_speed(speed_hz); }

double permissible_unbalance(double grade, double rotor_mass_kg, double speed_hz) {
  return permissible_eccentricity(grade, speed_hz) * rotor_mass_kg;
}

PlaneUnbalance split_unbalance(double unbalance, double to_a_m, double to_b_m) {
  if (!(to_a_m > 0.0) || !(to_b_m > 0.0)) {
    throw base::Error(base::ErrorKind::internal, "balance", "the centre of mass must lie between the bearings");
  }
  const double span = to_a_m + to_b_m;
  return {unbalance * to_b_m / span, unbalance * to_a_m / span};
}

double unbalance_force(double unbalance, double speed_hz) {
  const double w = angular_speed(speed_hz);
  return unbalance * w * w;
}

}  // namespace stillmass::machine
