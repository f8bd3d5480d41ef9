#include <cmath>
#include <numbers>

#include "stillmass/absorber/blade.hpp"
#include "stillmass/absorber/damper.hpp"
#include "stillmass/absorber/spring.hpp"
#include "stillmass/absorber/tuning.hpp"
#include "stillmass/base/error.hpp"

#include "support/catch.hpp"

using namespace stillmass::absorber;
namespace modal = stillmass::modal;

namespace {

constexpr double inch = 0.0254;
constexpr double pound_force = 4.4482216152605;
constexpr double psi = pound_force / (inch * inch);

Stock small_stock() {
  Stock stock;
  stock.materials = {{"steel", 210e9, 81e9, 7850.0, 32.3e6, 0.0}, {"wire", 206e9, 81.5e9, 7850.0, 0.0, 241e6}};
  for (const double width : {0.04, 0.06, 0.08}) {
    for (const double thickness : {0.005, 0.006, 0.008, 0.01}) stock.bars.push_back({width, thickness, "steel"});
  }
  for (const double diameter : {0.003, 0.004, 0.005, 0.006, 0.008}) stock.wires.push_back({diameter, "wire"});
  return stock;
}

}  // namespace

TEST_CASE("the cantilever with a tip mass has its published roots") {
  // CHECKS.md H1 (Math. Problems in Engineering 2017, 1568019, Tab. 1), tip mass equal to the blade's.
  const std::array<double, 5> published{1.557298, 16.25009, 50.89584, 105.1983, 179.2320};
  for (int n = 1; n <= 5; ++n) {
    CHECK(cantilever_root_squared(n, 1.0) == Approx(published[static_cast<std::size_t>(n - 1)]).epsilon(1e-6));
  }
  // CHECKS.md H3, bare cantilever (Blevins; Roark).
  CHECK(std::sqrt(cantilever_root_squared(1, 0.0)) == Approx(1.875104).epsilon(1e-6));
  CHECK(std::sqrt(cantilever_root_squared(2, 0.0)) == Approx(4.694091).epsilon(1e-6));
  CHECK(std::sqrt(cantilever_root_squared(3, 0.0)) == Approx(7.854757).epsilon(1e-6));
  // A heavy tip holds still: clamped-pinned overtones 3.9266, 7.0686 (Blevins).
  CHECK(std::sqrt(cantilever_root_squared(2, 1e6)) == Approx(3.9266).epsilon(1e-4));
  CHECK(std::sqrt(cantilever_root_squared(3, 1e6)) == Approx(7.0686).epsilon(1e-4));
}

TEST_CASE("33/140 of the blade's mass is off by the known amounts") {
  // CHECKS.md H4: error in percent against the exact root.
  const Blade blade{0.3, 0.05, 0.008, 210e9, 7850.0};
  const std::array<std::array<double, 2>, 7> errors{
      {{0.0, 1.465}, {0.1, 0.725}, {0.25, 0.346}, {0.5, 0.150}, {1.0, 0.053}, {2.0, 0.016}, {5.0, 0.003}}};
  for (const auto& row : errors) {
    const double tip = row[0] * blade.mass_kg();
    const double error = 100.0 * (blade.frequency(tip) / blade_frequency(blade, tip) - 1.0);
    CHECK(error == Approx(row[1]).margin(0.001));
  }
}

TEST_CASE("published blades come out") {
  SECTION("Grover Ex. 4.11.4: reed 50 x 6 x 0.75 mm at 1800 c/min (CHECKS.md H5)") {
    const Blade reed{0.05, 0.006, 0.00075, 196e9, 7850.0};
    const double whole = reed.tip_stiffness() / std::pow(2.0 * std::numbers::pi * 30.0, 2);
    CHECK(whole == Approx(0.02793).epsilon(0.005));
    CHECK(reed.frequency(0.02751) == Approx(30.0).epsilon(0.005));
  }
  SECTION("Wentzell Ex. 8.5: 72 x 12 x 1 in, 4 in (CHECKS.md H7)") {
    const Blade blade{72.0 * inch, 12.0 * inch, 1.0 * inch, 1e7 * psi, 2700.0};
    CHECK(blade.tip_stiffness() / (pound_force / inch) == Approx(80.376).epsilon(1e-3));
    CHECK(blade.tip_stiffness() * 4.0 * inch / pound_force == Approx(321.5).epsilon(1e-3));
  }
  SECTION("root stress is that of the end load (CHECKS.md H10, beam theory)") {
    const Blade blade{0.3, 0.05, 0.008, 210e9, 7850.0};
    const double force = blade.tip_stiffness() * 0.002;
    const double modulus = 0.05 * 0.008 * 0.008 / 6.0;
    CHECK(blade.root_stress(0.002) == Approx(force * 0.3 / modulus).epsilon(1e-12));
  }
}

TEST_CASE("published helical springs come out") {
  SECTION("Wentzell Ex. 8.2: d 0.105 in, D 0.62 in, 70 lb/in (CHECKS.md H11; 12.79 coils with the dead ones off)") {
    HelicalSpring spring{0.105 * inch, 0.62 * inch, 1.0, 11.85e6 * psi, 7850.0};
    spring.active_coils = spring.rate() / (70.0 * pound_force / inch);
    CHECK(spring.active_coils + 2.0 == Approx(12.79).epsilon(1e-3));
  }
  SECTION("Wahl's factor (CHECKS.md H12)") {
    const std::array<std::array<double, 2>, 6> rows{
        {{4, 1.4038}, {5, 1.3105}, {6, 1.2525}, {8, 1.1840}, {10, 1.1448}, {12, 1.1194}}};
    for (const auto& row : rows) CHECK(wahl_factor(row[0]) == Approx(row[1]).margin(6e-5));
    CHECK(wahl_factor(6.25) == Approx(1.25).epsilon(0.01));
  }
  SECTION("Shigley Ex. 10-1: rate and surge of a music-wire spring (CHECKS.md H13, H14)") {
    // d 0.037 in, outside 7/16 in, 12.5 turns of which 10.5 work, G 11.85 Mpsi, 0.284 lbf/in3.
    const double density = 0.284 * 0.45359237 / std::pow(inch, 3);
    const HelicalSpring spring{0.037 * inch, (7.0 / 16.0 - 0.037) * inch, 10.5, 11.85e6 * psi, density};
    CHECK(spring.rate() / (pound_force / inch) == Approx(4.116).epsilon(0.005));
    CHECK(spring.index() == Approx(10.82).epsilon(1e-3));
    CHECK(spring.surge_frequency() == Approx(313.8).epsilon(1e-3));
  }
}

TEST_CASE("every blade option has the frequency, the mass and the strength asked for") {
  const modal::SprungMass absorber{5.9, 24.635, 0.004};
  constexpr double travel = 0.27e-3;
  const auto options = blade_options(absorber, travel, small_stock(), 1.5, 20);
  REQUIRE(options.size() >= 3);
  for (const auto& option : options) {
    CHECK(blade_frequency(option.blade, option.tip_mass_kg) == Approx(24.635).epsilon(1e-5));
    const double moving = option.count * (option.tip_mass_kg + 33.0 / 140.0 * option.blade.mass_kg());
    CHECK(moving == Approx(5.9).epsilon(1e-9));
    // Stiffness and mass agree: the sum of the blades is the absorber's spring (33/140 is good to 0.4 % of the
    // frequency where the tip is as heavy as the blade or heavier).
    CHECK(option.count * option.blade.tip_stiffness() == Approx(absorber.stiffness()).epsilon(8e-3));
    CHECK(option.endurance_factor >= 1.5);
    CHECK(option.stress_pa == Approx(option.blade.root_stress(travel)).epsilon(1e-12));
    CHECK(option.second_mode_hz > 3.0 * absorber.frequency_hz);
    // f^2 ~ 1 / (L^3 (M + 33/140 m)): -(1.5 + half of the blade's part of the moving mass) f / L.
    const double part = 1.0 - option.count * option.tip_mass_kg / 5.9;
    CHECK(option.frequency_per_m == Approx(-(1.5 + 0.5 * part) * 24.635 / option.blade.length_m).epsilon(0.01));
  }
}

TEST_CASE("blades that would break at the travel are not offered") {
  const modal::SprungMass absorber{5.9, 24.635, 0.004};
  for (const auto& option : blade_options(absorber, 4e-3, small_stock(), 1.5, 20))
    CHECK(option.endurance_factor >= 1.5);
  CHECK(blade_options(absorber, 40e-3, small_stock()).empty());
  CHECK(blade_options(absorber, 1e-3, Stock{}).empty());
  Stock unknown = small_stock();
  unknown.bars.push_back({0.05, 0.005, "unobtainium"});
  CHECK_THROWS_AS(blade_options(absorber, 1e-3, unknown), stillmass::base::Error);
}

TEST_CASE("every spring option has the stiffness asked for and surges far above it") {
  const modal::SprungMass absorber{5.9, 24.635, 0.004};
  const auto options = spring_options(absorber, 0.27e-3, small_stock(), 1.5, 20);
  REQUIRE_FALSE(options.empty());
  for (const auto& option : options) {
    CHECK(option.count * option.spring.rate() == Approx(absorber.stiffness()).epsilon(1e-12));
    CHECK(option.surge_hz >= 5.0 * 24.635);
    CHECK(option.solid_mass_kg + option.count * option.spring.mass_kg() / 3.0 == Approx(5.9).epsilon(1e-12));
  }
}

TEST_CASE("the tuning chart runs through the design point, from long and low to short and high") {
  const auto option = blade_options({5.9, 24.635, 0.004}, 0.27e-3, small_stock()).front();
  const auto chart = tuning_chart(option.blade, option.tip_mass_kg);
  REQUIRE(chart.size() == 11);
  CHECK(chart.front().frequency_hz == Approx(0.9 * 24.635).epsilon(1e-5));
  CHECK(chart[5].free_length_m == option.blade.length_m);
  CHECK(chart[5].frequency_hz == Approx(24.635).epsilon(1e-5));
  CHECK(chart.back().frequency_hz == Approx(1.1 * 24.635).epsilon(1e-5));
  for (std::size_t i = 1; i < chart.size(); ++i) {
    CHECK(chart[i].free_length_m < chart[i - 1].free_length_m);
    CHECK(chart[i].frequency_hz > chart[i - 1].frequency_hz);
  }
  CHECK(free_length_for(option.blade, option.tip_mass_kg, chart[8].frequency_hz) ==
        Approx(chart[8].free_length_m).epsilon(1e-8));
  CHECK_THROWS_AS(free_length_for(option.blade, option.tip_mass_kg, 1000.0), stillmass::base::Error);
}

TEST_CASE("temperature and added mass move the tuning as the square root says") {
  CHECK(frequency_per_kelvin(-2.5e-4) == -1.25e-4);
  const double added = mass_to_add(10.0, 25.0, 24.0);
  CHECK(25.0 * std::sqrt(10.0 / (10.0 + added)) == Approx(24.0).epsilon(1e-12));
  CHECK(mass_to_add(10.0, 24.0, 25.0) < 0.0);
}

TEST_CASE("the damper's duty follows from the travel") {
  const modal::SprungMass absorber{15.0, 23.3, 0.12};
  const auto duty = damper_duty(absorber, 1e-3, 23.3);
  const double w = 2.0 * std::numbers::pi * 23.3;
  CHECK(duty.damping_constant == Approx(2.0 * 0.12 * 15.0 * w).epsilon(1e-12));
  CHECK(duty.peak_force == Approx(duty.damping_constant * w * 1e-3).epsilon(1e-12));
  // Energy a turn of a viscous damper: pi c w z^2.
  CHECK(duty.power_w / 23.3 == Approx(std::numbers::pi * duty.damping_constant * w * 1e-6).epsilon(1e-12));
  CHECK(duty.loss_factor == 0.24);
  CHECK(shear_plate_damping(1.0, 0.01, 0.5e-3) == Approx(40.0).epsilon(1e-12));
}
