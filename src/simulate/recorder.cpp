#include "simulate/recorder.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::simulate {
namespace {

constexpr double least_fine_rate_hz = 30000.0;

}  // namespace

std::size_t oversampling(double rate_hz) {
  std::size_t factor = 2;
  while (rate_hz * static_cast<double>(factor) < least_fine_rate_hz) factor *= 2;
  return factor;
}

double stored(double fraction, int bits) {
  const double full_scale = std::ldexp(1.0, bits - 1);
  return std::clamp(std::nearbyint(fraction * full_scale), -full_scale, full_scale - 1.0) / full_scale;
}

}  // namespace stillmass::simulate
