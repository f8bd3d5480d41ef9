#include "stillmass/absorber/spring.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stillmass::absorber {
namespace {

constexpr double least_coils = 3.0;
constexpr double most_coils = 12.0;
constexpr double surge_above = 5.0;  // times the absorber's frequency (common practice)

}  // namespace

double HelicalSpring::rate() const {
  return shear_modulus * std::pow(wire_m, 4) / (8.0 * std::pow(coil_m, 3) * active_coils);
}

double HelicalSpring::mass_kg() const {
  return std::numbers::pi * std::numbers::pi * wire_m * wire_m * coil_m * active_coils * density / 4.0;
}

double HelicalSpring::shear_stress(double force_n) const {
  return wahl_factor(index()) * 8.0 * force_n * coil_m / (std::numbers::pi * std::pow(wire_m, 3));
}

double HelicalSpring::surge_frequency() const { return 0.5 * std::sqrt(rate() / mass_kg()); }

double wahl_factor(double index) { return (4.0 * index - 1.0) / (4.0 * index - 4.0) + 0.615 / index; }

std::vector<SpringOption> spring_options(const modal::SprungMass& absorber, double travel_m, const Stock& stock,
                                         double endurance_factor, std::size_t at_most) {
  std::vector<SpringOption> options;
  for (const Wire& wire : stock.wires) {
    const Material& material = stock.material(wire.material);
    if (!(material.shear_endurance > 0.0)) continue;
    for (const int count : {2, 4, 8}) {
      for (const double index : {5.0, 6.0, 7.0, 8.0, 10.0}) {
        const double rate = absorber.stiffness() / count;
        HelicalSpring spring{wire.diameter_m, index * wire.diameter_m, 1.0, material.shear_modulus, material.density};
        spring.active_coils = spring.rate() / rate;
        if (spring.active_coils < least_coils || spring.active_coils > most_coils) continue;
        SpringOption option;
        option.material = material.name;
        option.count = count;
        option.spring = spring;
        option.solid_mass_kg = absorber.mass_kg - count * spring.mass_kg() / 3.0;
        option.stress_pa = spring.shear_stress(rate * travel_m);
        option.endurance_factor = material.shear_endurance / option.stress_pa;
        option.surge_hz = spring.surge_frequency();
        const bool stands = option.solid_mass_kg > 0.5 * absorber.mass_kg &&
                            option.surge_hz >= surge_above * absorber.frequency_hz &&
                            option.endurance_factor >= endurance_factor;
        if (stands) options.push_back(option);
      }
    }
  }
  std::stable_sort(options.begin(), options.end(), [](const SpringOption& a, const SpringOption& b) {
    return a.endurance_factor > b.endurance_factor;
  });
  if (options.size() > at_most) options.resize(at_most);
  return options;
}

}  // namespace stillmass::absorber
