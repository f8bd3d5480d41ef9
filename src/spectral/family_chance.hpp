#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/spectral/blind_family.hpp"

namespace stillmass::spectral {

/// Standard uncertainty of a tone's frequency, at least a twentieth of a line: speeds are not that steady.
double least_u(const Tone& tone, double line_hz);

/// The tones in the order of their frequency, and how densely they stand.
class FamilyTones {
 public:
  FamilyTones(std::span<const Tone> tones, double line_hz);

  /// Which tones are not taken out, ascending frequency.
  std::span<const std::size_t> free() const { return free_; }
  void take_out(std::size_t tone) { std::erase(free_, tone); }
  /// A list that never held those.
  FamilyTones without(std::span<const std::size_t> tones) const;

  double frequency(std::size_t tone) const { return tones_[tone].frequency.value; }
  double u(std::size_t tone) const { return u_[tone]; }
  double amplitude(std::size_t tone) const { return tones_[tone].amplitude_rms.value; }
  double typical_u() const { return typical_u_; }
  /// That an unrelated tone stands within the tolerance of a frequency: 1 - exp(-2 tolerance density), the density that
  /// of the eight tones nearest to it or of all, whichever is more.
  double chance_of_a_hit(double frequency_hz, double tolerance_hz) const;
  /// The free tone nearest to a frequency, within the tolerance that `u_hz` of the prediction and its own give.
  std::ptrdiff_t nearest(double frequency_hz, double u_hz) const;

 private:
  void count();

  std::span<const Tone> tones_;
  std::vector<double> u_;
  std::vector<std::size_t> free_;
  std::vector<double> ascending_;  ///< frequencies
  double typical_u_ = 0.0;
  double density_ = 0.0;  ///< tones a Hz
};

/// How far, in standard uncertainties, a member may stand from its place: 1.2 % of true ones stand further.
inline constexpr double family_widths = 2.5;

/// That of independent hits of these probabilities `met` or more happen: Poisson, which is an upper bound where `met`
/// exceeds their sum by 1. Source: Hoeffding, Ann. Math. Stat. 27 (1956) 713 (from memory).
double chance_of_hits(double expected, std::size_t met);

std::vector<SideBandFamily> side_band_families(const FamilyTones& tones, std::span<const HarmonicFamily> harmonics,
                                               const FamilyOptions& options);

}  // namespace stillmass::spectral
