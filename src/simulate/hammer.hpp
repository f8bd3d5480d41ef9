#pragma once

#include <cstdint>
#include <vector>

#include "stillmass/numeric/random.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

/// One contact of the hammer: F = peak sin(pi (t - start) / duration).
struct Pulse {
  double start_s = 0.0;
  double peak_n = 0.0;
  double duration_s = 0.0;
};

/// The blows of a bump test, in order of time: peaks spread as the hand does, instants up to 0.3 s off the beat, one
/// blow that bounces and one that is too hard where the skid file asks for them.
std::vector<Pulse> blows_of(const Hammer& hammer, const numeric::Random& random, std::uint64_t stream);

/// Force at that instant.
double force_at(const std::vector<Pulse>& pulses, double time_s);

}  // namespace stillmass::simulate
