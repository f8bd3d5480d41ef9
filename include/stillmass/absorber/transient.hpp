#pragma once

#include <optional>

#include "stillmass/absorber/forcing.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// Travel while the machine's speed passes the lower split resonance at start or stop.
struct PassingTravel {
  double split_hz = 0.0;  ///< lower split frequency
  double steady_m = 0.0;  ///< peak travel if the speed dwelt there: an upper bound for a steady passage that starts
                          ///< well away from the resonance
  std::optional<double> passing_m;  ///< estimate at the given sweep rate
};

/// `line_rms`: velocity of the forcing line at the duty frequency without the absorber, m/s r.m.s. The force is carried
/// to the split frequency as `Forcing` says (unbalance: it falls with the square of the speed; not for random).
/// `sweep_hz_per_s`: how fast the forcing frequency moves; the steady value is then reduced by
/// 1 - exp(-2.86 eta^-0.445), eta = sweep rate / (2 zeta f)^2 (Cronin 1968; 0.02 absolute for eta <= 100), with the
/// damping of the split mode.
/// Throws `Error` (usage) for random forcing.
PassingTravel passing_travel(const modal::OneMode& machine, const modal::SprungMass& absorber,
                             const ForcingRange& forcing, double line_rms, std::optional<double> sweep_hz_per_s = {});

}  // namespace stillmass::absorber
