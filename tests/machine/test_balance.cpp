#include "stillmass/machine/balance.hpp"

#include "support/catch.hpp"

using namespace stillmass;

namespace {
constexpr double kilogram_per_pound = 0.45359237;
constexpr double kg_m_per_oz_in = kilogram_per_pound / 16.0 * 0.0254;
}  // namespace

TEST_CASE("the permissible unbalance in ounce inches is 6.015 G W / N (B1)") {
  // Magazine article on balancing, restating ISO 1940-1: U [oz in] = 6.015 G W [lb] / N [r/min]; tolerance 1e-3.
  const double pounds = 250.0;
  const double rpm = 1750.0;
  const double unbalance = machine::permissible_unbalance(6.3e-3, pounds * kilogram_per_pound, rpm / 60.0);
  CHECK(unbalance / kg_m_per_oz_in == Approx(6.015 * 6.3 * pounds / rpm).epsilon(1e-3));
}

TEST_CASE("the turbine rotor of the standard's annex (B3)") {
  // ISO 1940-1:2003 / ISO 21940-11:2016 annex example (from memory, confirmed): 3600 kg, 3000 r/min, G 2.5, arms 1500
  // and 900 mm: 28.6e3 g mm, split 10.7e3 and 17.9e3; tolerance 0.5 %.
  const double unbalance = machine::permissible_unbalance(2.5e-3, 3600.0, 50.0);
  CHECK(unbalance * 1e6 == Approx(28.6e3).epsilon(5e-3));
  CHECK(machine::permissible_eccentricity(2.5e-3, 50.0) * 1e6 == Approx(7.958).epsilon(1e-4));
  const auto planes = machine::split_unbalance(unbalance, 1.5, 0.9);
  CHECK(planes.a * 1e6 == Approx(10.7e3).epsilon(5e-3));
  CHECK(planes.b * 1e6 == Approx(17.9e3).epsilon(5e-3));
}

TEST_CASE("e_per of G 6.3 is 40.1 and 20.05 um at 1500 and 3000 r/min (B4)") {
  CHECK(machine::permissible_eccentricity(6.3e-3, 1500.0 / 60.0) * 1e6 == Approx(40.107).epsilon(1e-4));
  CHECK(machine::permissible_eccentricity(6.3e-3, 3000.0 / 60.0) * 1e6 == Approx(20.054).epsilon(1e-4));
}

TEST_CASE("pumps and fans are balanced to G 6.3 (B5), and every grade has a source") {
  CHECK(machine::usual_grade(machine::MachineKind::pump)->name == "G 6.3");
  CHECK(machine::usual_grade(machine::MachineKind::fan)->grade == Approx(6.3e-3));
  CHECK(machine::usual_grade(machine::MachineKind::motor)->name == "G 2.5");
  for (const auto& grade : machine::balance_grades()) CHECK_FALSE(grade.source.empty());
}

TEST_CASE("the force of an unbalance is U w squared") {
  // 0.01 kg m at 25 Hz: w = 157.08 rad/s, 246.7 N.
  CHECK(machine::unbalance_force(0.01, 25.0) == Approx(246.74).epsilon(1e-4));
}
