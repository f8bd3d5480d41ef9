#include "stillmass/absorber/tuning.hpp"

#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/root.hpp"

namespace stillmass::absorber {

std::vector<TuningPoint> tuning_chart(const Blade& blade, double tip_mass_kg, double range, int steps) {
  if (steps < 3 || !(range > 0.0 && range < 0.5)) {
    throw base::Error(base::ErrorKind::internal, "tuning chart", "out of range");
  }
  const double design_hz = blade_frequency(blade, tip_mass_kg);
  const double longest = free_length_for(blade, tip_mass_kg, design_hz * (1.0 - range));
  const double shortest = free_length_for(blade, tip_mass_kg, design_hz * (1.0 + range));
  std::vector<TuningPoint> chart;
  const auto add = [&](double from, double to, int of, int begin) {
    for (int i = begin; i <= of; ++i) {
      Blade at = blade;
      at.length_m = from + (to - from) * i / of;
      chart.push_back({at.length_m, blade_frequency(at, tip_mass_kg)});
    }
  };
  add(longest, blade.length_m, steps / 2, 0);
  add(blade.length_m, shortest, steps / 2, 1);
  return chart;
}

double free_length_for(const Blade& blade, double tip_mass_kg, double frequency_hz) {
  const auto misfit = [&](double length_m) {
    Blade tried = blade;
    tried.length_m = length_m;
    return blade_frequency(tried, tip_mass_kg) - frequency_hz;
  };
  const base::Interval lengths{blade.length_m / 3.0, 3.0 * blade.length_m};
  if (misfit(lengths.lo) < 0.0 || misfit(lengths.hi) > 0.0) {
    throw base::usage_error("free length", "no length near this one gives the frequency");
  }
  return numeric::bracketed_root(misfit, lengths, 1e-9);
}

double frequency_per_kelvin(double modulus_per_k) { return 0.5 * modulus_per_k; }

double mass_to_add(double mass_kg, double now_hz, double wanted_hz) {
  const double ratio = now_hz / wanted_hz;
  return mass_kg * (ratio * ratio - 1.0);
}

}  // namespace stillmass::absorber
