#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/spectral/close_tones.hpp"

namespace stillmass::spectral {

/// From lines about the centre of a band to Hz and to the channel's unit.
struct CloseScale {
  double centre_hz = 0.0;
  double half_width_hz = 0.0;
  double rate_hz = 0.0;       ///< of the complex samples
  double middle_turns = 0.0;  ///< by which phases at the middle of the stretch are behind the recorded cosine's
  base::Quantity quantity = base::Quantity::acceleration;
};

/// What the tones of one stretch are.
struct CloseJudgement {
  Closeness closeness = Closeness::none;
  std::vector<CloseTone> tones;
  std::optional<double> record_s;
  std::optional<double> wander_hz;
  std::optional<double> variation;
  double noise_density = 0.0;
  double evidence = 0.0;
};

/// Of a stretch of complex samples, at least 16.
CloseJudgement judged(std::span<const std::complex<double>> samples, const CloseScale& scale);

}  // namespace stillmass::spectral
