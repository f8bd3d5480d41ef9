#pragma once

#include <vector>

#include "stillmass/absorber/blade.hpp"

namespace stillmass::absorber {

/// One row of the tuning chart.
struct TuningPoint {
  double free_length_m = 0.0;
  double frequency_hz = 0.0;  ///< the absorber on a clamp
};

/// Frequency of a blade absorber against its free length: `steps` (odd, >= 3) rows around the design length, over
/// +-`range` (relative, of the frequency). By the exact cantilever with tip mass; longest (lowest) first.
std::vector<TuningPoint> tuning_chart(const Blade& blade, double tip_mass_kg, double range = 0.1, int steps = 11);

/// The free length that gives a frequency with this tip mass, m; `blade.length_m` is where the search starts. Lengths
/// from a third to three times of it are tried; throws `Error` (usage) where none gives the frequency.
double free_length_for(const Blade& blade, double tip_mass_kg, double frequency_hz);

/// Relative change of frequency per kelvin of a spring whose modulus changes by `modulus_per_k`: half of it.
double frequency_per_kelvin(double modulus_per_k);

/// Mass to add (positive) or take away (negative) so that an absorber now at `now_hz` comes to `wanted_hz`, spring
/// unchanged, kg.
double mass_to_add(double mass_kg, double now_hz, double wanted_hz);

}  // namespace stillmass::absorber
