#pragma once

#include <vector>

#include "stillmass/absorber/prediction.hpp"

namespace stillmass::absorber {

/// Fractions of the natural frequency between which a spectrum is taken for response of the mode.
inline constexpr base::Interval modelled_range{0.7, 1.4};

/// Part of a spectrum, mean square in (m/s)^2 at a frequency.
struct Portion {
  double frequency_hz = 0.0;
  double mean_square = 0.0;
};

/// The vibration before, taken apart. Mean squares in (m/s)^2.
struct Composition {
  double overall = 0.0;        ///< r.m.s., m/s
  double relative_u = 0.0;     ///< of every velocity here, common to all
  double line = 0.0;           ///< of the forcing line, at the duty frequency
  std::vector<Portion> noise;  ///< response of the mode beside the line
  double white = 0.0;          ///< response of the mode to a white force, without knowing its spectrum
  double outside = 0.0;        ///< everything else
};

/// Throws `Error` (usage) where nothing was measured or the values make no sense.
Composition compose(const Before& before, const ForcingRange& forcing, double natural_hz, double relative_u_unknown);

}  // namespace stillmass::absorber
