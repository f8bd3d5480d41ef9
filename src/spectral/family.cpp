#include "stillmass/spectral/family.hpp"

#include <algorithm>
#include <cmath>

namespace stillmass::spectral {

namespace {

/// The tone nearest to `target` within the tolerance of the two uncertainties, or half a line.
std::optional<std::size_t> nearest(std::span<const Tone> tones, double target, double target_u, double line_hz) {
  std::optional<std::size_t> best;
  double least = 0.0;
  for (std::size_t i = 0; i < tones.size(); ++i) {
    const base::Estimate& f = tones[i].frequency;
    const double distance = std::abs(f.value - target);
    const double tolerance = std::max(2.0 * std::hypot(f.u.value_or(0.0), target_u), 0.5 * line_hz);
    if (distance <= tolerance && (!best || distance < least)) {
      best = i;
      least = distance;
    }
  }
  return best;
}

}  // namespace

std::optional<int> harmonic_number(double frequency_hz, double fundamental_hz, double tolerance_hz) {
  if (!(fundamental_hz > 0.0)) return std::nullopt;
  const double number = std::round(frequency_hz / fundamental_hz);
  if (number < 1.0 || std::abs(frequency_hz - number * fundamental_hz) > tolerance_hz) return std::nullopt;
  return static_cast<int>(number);
}

std::vector<FamilyMember> harmonics(std::span<const Tone> tones, const base::Estimate& fundamental, double line_hz,
                                    int greatest) {
  std::vector<FamilyMember> members;
  for (int k = 1; k <= greatest; ++k) {
    const auto tone = nearest(tones, k * fundamental.value, k * fundamental.u.value_or(0.0), line_hz);
    if (tone) members.push_back({k, *tone});
  }
  return members;
}

std::vector<FamilyMember> side_bands(std::span<const Tone> tones, const base::Estimate& carrier,
                                     const base::Estimate& spacing, double line_hz, int greatest) {
  std::vector<FamilyMember> members;
  for (int k = -greatest; k <= greatest; ++k) {
    if (k == 0) continue;
    const double u = std::hypot(carrier.u.value_or(0.0), k * spacing.u.value_or(0.0));
    const auto tone = nearest(tones, carrier.value + k * spacing.value, u, line_hz);
    if (tone) members.push_back({k, *tone});
  }
  return members;
}

}  // namespace stillmass::spectral
