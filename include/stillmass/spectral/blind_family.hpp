#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/spectral/family.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

/// Tones of several channels (or of one) as one list: tones whose frequencies agree within 2.5 standard uncertainties
/// (or `line_hz` / 20) are one, its frequency their weighted mean, the rest of it that of the strongest. Ascending
/// frequency.
std::vector<Tone> gathered(std::span<const std::vector<Tone>> channels, double line_hz);

struct FamilyOptions {
  int greatest = 40;        ///< highest harmonic number
  int greatest_side = 5;    ///< highest number of a side band
  std::size_t members = 3;  ///< of harmonics at least (common practice: two numbers always have a common divisor)
  double chance = 0.01;     ///< a family is given where that many or fewer of its kind are expected among as many
                            ///< tones without any order
  std::size_t most = 8;     ///< families of each kind
};

/// Tones at multiples of a fundamental that nobody named.
struct HarmonicFamily {
  base::Estimate fundamental;         ///< Hz: mean of f_k / k, weighted by (k / u_k)^2
  std::vector<FamilyMember> members;  ///< ascending number
  std::vector<int> missing;           ///< numbers between 1 and the highest member's without a tone
  bool half_orders = false;  ///< the stronger members are even: the machine turns at 2 x fundamental, and the odd ones
                             ///< are its 0.5x, 1.5x, 2.5x ...
  double chance = 0.0;       ///< expected number of such families in a list of as many tones without order
};

/// Tones at equal distances about a carrier.
struct SideBandFamily {
  std::size_t carrier = 0;                ///< which of the tones
  base::Estimate spacing;                 ///< Hz: weighted least squares over all carriers that share it
  std::vector<FamilyMember> members;      ///< ascending number, without 0
  bool symmetric = false;                 ///< each number is there on both sides
  std::optional<std::size_t> spacing_of;  ///< the harmonic family whose fundamental the spacing is
  double chance = 0.0;                    ///< as of `HarmonicFamily`, of this spacing
};

struct Families {
  std::vector<HarmonicFamily> harmonics;   ///< least chance first
  std::vector<SideBandFamily> side_bands;  ///< least chance first, carriers of one spacing together
};

/// The families among the tones of one list (of `gathered`, or one channel's), found without knowing a speed.
///
/// Fundamentals tried: every f_i / k. A tone belongs where it is within 2.5 standard uncertainties (of tone and
/// prediction; at least `line_hz` / 20). The least surprising explanation by chance (binomial, local density of tones,
/// times the number of fundamentals tried) wins, is refined, and its tones are taken out before the next is looked for.
/// A fundamental at 1/2, 1/3, ... of another is kept only where at least two members need it and chance does not
/// explain them, or where the strongest tone of all stands there. Side bands: spacings f_j - f_i tried on every carrier
/// stronger than the tones beside it; a spacing counts over all carriers that show it. A run of harmonics is not its
/// own side bands: such a carrier must stand apart from the low harmonics. Cost: of the order of n^2 greatest; 200
/// tones take milliseconds.
Families families(std::span<const Tone> tones, double line_hz, const FamilyOptions& options = {});

}  // namespace stillmass::spectral
