#include "stillmass/absorber/blade.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <optional>

#include "stillmass/base/error.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/numeric/root.hpp"

namespace stillmass::absorber {
namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;
constexpr double share_of_blade = 33.0 / 140.0;  // of the blade's mass that moves with the tip (Rayleigh)
constexpr base::Interval length_over_thickness{10.0, 200.0};
constexpr double longest_m = 0.8;
constexpr double length_over_block = 2.5;  // shorter, and the rotary inertia of a steel block of the tip's mass counts
constexpr double steel_density = 7850.0;   // kg/m3
constexpr double enough_endurance = 3.0;   // beyond it a lower stress gains nothing

/// The blade whose free length gives the absorber's frequency, with the rest of its share of the mass at the tip.
std::optional<BladeOption> fit(const modal::SprungMass& absorber, const FlatBar& bar, const Material& material,
                               int count) {
  const double share_kg = absorber.mass_kg / count;
  Blade blade{0.0, bar.width_m, bar.thickness_m, material.youngs_modulus, material.density};
  const auto tip_mass = [&](double length_m) {
    blade.length_m = length_m;
    return share_kg - share_of_blade * blade.mass_kg();
  };
  const auto misfit = [&](double length_m) {
    const double tip_kg = tip_mass(length_m);
    return blade_frequency(blade, std::max(tip_kg, 0.0)) - absorber.frequency_hz;
  };
  const double shortest = length_over_thickness.lo * bar.thickness_m;
  const double longest = std::min(longest_m, length_over_thickness.hi * bar.thickness_m);
  if (!(shortest < longest) || misfit(shortest) < 0.0 || misfit(longest) > 0.0) return {};
  const double length_m = numeric::bracketed_root(misfit, {shortest, longest}, 1e-7);
  const double tip_kg = tip_mass(length_m);
  const double block_m = std::cbrt(tip_kg / steel_density);
  if (tip_kg < 0.5 * share_kg || length_m < length_over_block * block_m) return {};

  BladeOption option;
  option.material = material.name;
  option.count = count;
  option.blade = blade;
  option.tip_mass_kg = tip_kg;
  return option;
}

void rate(BladeOption& option, double travel_m, double endurance_pa) {
  const Blade& blade = option.blade;
  option.stress_pa = blade.root_stress(travel_m);
  option.sag_m = option.tip_mass_kg * base::standard_gravity / blade.tip_stiffness();
  option.weight_stress_pa = blade.root_stress(option.sag_m);
  option.endurance_factor = endurance_pa / option.stress_pa;
  Blade longer = blade;
  Blade shorter = blade;
  const double step = 1e-3 * blade.length_m;
  longer.length_m += step;
  shorter.length_m -= step;
  option.frequency_per_m =
      (blade_frequency(longer, option.tip_mass_kg) - blade_frequency(shorter, option.tip_mass_kg)) / (2.0 * step);
  option.second_mode_hz = blade_frequency(blade, option.tip_mass_kg, 2);
}

}  // namespace

double Blade::bending_stiffness() const { return youngs_modulus * width_m * std::pow(thickness_m, 3) / 12.0; }

double Blade::tip_stiffness() const { return 3.0 * bending_stiffness() / std::pow(length_m, 3); }

double Blade::root_stress(double tip_deflection_m) const {
  return 1.5 * youngs_modulus * thickness_m * tip_deflection_m / (length_m * length_m);
}

double Blade::frequency(double tip_mass_kg) const {
  return std::sqrt(tip_stiffness() / (tip_mass_kg + share_of_blade * mass_kg())) / two_pi;
}

double cantilever_root_squared(int n, double mass_ratio) {
  if (n < 1 || !(mass_ratio >= 0.0)) throw base::Error(base::ErrorKind::internal, "cantilever root", "out of range");
  // The equation over cosh x, which stays finite.
  const auto equation = [&](double x) {
    return 1.0 / std::cosh(x) + std::cos(x) + mass_ratio * x * (std::cos(x) * std::tanh(x) - std::sin(x));
  };
  const double pi = std::numbers::pi;
  const double x = numeric::bracketed_root(equation, {(n - 1) * pi, (n - 0.5) * pi + 0.31}, 1e-13);
  return x * x;
}

double blade_frequency(const Blade& blade, double tip_mass_kg, int n) {
  const double root = cantilever_root_squared(n, tip_mass_kg / blade.mass_kg());
  return root * std::sqrt(blade.bending_stiffness() / (blade.mass_kg() * std::pow(blade.length_m, 3))) / two_pi;
}

std::vector<BladeOption> blade_options(const modal::SprungMass& absorber, double travel_m, const Stock& stock,
                                       double endurance_factor, std::size_t at_most) {
  std::vector<BladeOption> options;
  for (const FlatBar& bar : stock.bars) {
    const Material& material = stock.material(bar.material);
    if (!(material.bending_endurance > 0.0)) continue;
    for (const int count : {1, 2, 4}) {
      auto option = fit(absorber, bar, material, count);
      if (!option) continue;
      rate(*option, travel_m, material.bending_endurance);
      if (option->endurance_factor >= endurance_factor) options.push_back(*option);
    }
  }
  std::stable_sort(options.begin(), options.end(), [](const BladeOption& a, const BladeOption& b) {
    const double strong_a = std::min(a.endurance_factor, enough_endurance);
    const double strong_b = std::min(b.endurance_factor, enough_endurance);
    return strong_a != strong_b ? strong_a > strong_b : a.blade.length_m < b.blade.length_m;
  });
  if (options.size() > at_most) options.resize(at_most);
  return options;
}

}  // namespace stillmass::absorber
