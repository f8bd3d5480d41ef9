#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

/// The whole number k >= 1 with |f - k f0| <= tolerance, if there is one (tolerance below f0 / 2).
std::optional<int> harmonic_number(double frequency_hz, double fundamental_hz, double tolerance_hz);

/// A tone as member of a family.
struct FamilyMember {
  int number = 0;        ///< k of k f0, or of carrier + k spacing
  std::size_t tone = 0;  ///< which of the tones
};

/// The tones at multiples of a fundamental, each number once (the nearest tone), ascending. A tone belongs where it is
/// within two standard uncertainties (of tone and k times fundamental) or `line_hz` / 2, whichever is more.
std::vector<FamilyMember> harmonics(std::span<const Tone> tones, const base::Estimate& fundamental, double line_hz,
                                    int greatest = 50);

/// The tones at carrier + k spacing, k = -greatest ... greatest without 0, in the same way.
std::vector<FamilyMember> side_bands(std::span<const Tone> tones, const base::Estimate& carrier,
                                     const base::Estimate& spacing, double line_hz, int greatest = 5);

}  // namespace stillmass::spectral
