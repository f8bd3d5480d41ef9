#pragma once

#include <array>

#include "stillmass/absorber/forcing.hpp"

namespace stillmass::absorber {

/// A sizing in ratios.
struct Sizing {
  double tuning = 0.0;         ///< absorber's frequency over the machine's
  double damping_ratio = 0.0;  ///< c / (2 sqrt(k m)), at the absorber's own frequency
  /// Height of the response that was made least: |x| over F/k (constant), over m0 e/M (unbalance), over a/w1^2
  /// (base); for velocity the same times f/f1; for random the mean square as in `WhiteResponse`.
  double height = 0.0;
};

/// The classical optimum for an undamped machine and the least displacement; mu = absorber's mass over modal mass > 0.
/// `height` is that of the fixed points: the true maximum lies a little above it (0.1 to 3 %); exact for random.
///   constant:  tuning 1/(1+mu),              damping^2 3 mu/(8(1+mu)),              sqrt(1 + 2/mu)
///   unbalance: tuning 1/sqrt(1+mu),          damping^2 3 mu/(8(1+mu/2)),            sqrt(2/(mu(1+mu)))
///   base:      tuning sqrt(1-mu/2)/(1+mu),   damping^2 3 mu/(8(1+mu)(1-mu/2)),      (1+mu) sqrt(2/mu)   (mu < 2)
///   random:    tuning sqrt(1+mu/2)/(1+mu),   damping^2 mu(1+3mu/4)/(4(1+mu)(1+mu/2)), sqrt((1+3mu/4)/(mu(1+mu)))
/// Sources: Den Hartog sec. 3.3 with Brock 1946 (constant); Warburton 1982, Table 1 (the others, from memory).
/// Throws `Error` (usage) for a mass ratio outside its range.
Sizing classical(double mass_ratio, Forcing forcing);

/// The exact least maximum of the displacement of an undamped machine under a constant force. The height is the true
/// maximum. Source: Nishihara & Asami 2002, J. Vib. Acoust. 124 (from memory, confirmed by direct minimax).
Sizing exact_constant(double mass_ratio);

/// Least maximum of the displacement of a machine with damping ratio z1 under a constant force: a fit, tuning within
/// 0.3 %, damping 1 %, for mu 0.03 to 0.4 and z1 up to 0.15. `height` is 0: the fit gives none.
/// Source: Ioi & Ikeda 1978, as quoted in later papers (from memory).
Sizing ioi_ikeda(double mass_ratio, double machine_damping);

/// The viscous damper without a spring: damping constant over 2 m2 w1, and the greatest |x k / F| = 1 + 2/mu.
/// `tuning` is 0. Source: Den Hartog sec. 3.3.
Sizing houdaille(double mass_ratio);

/// The two squared frequency ratios at which |x| does not depend on the absorber's damping, for the optimum tuning
/// 1/(1+mu): (1 -+ sqrt(mu/(2+mu)))/(1+mu). Source: Brock 1946.
std::array<double, 2> fixed_points(double mass_ratio);

/// Undamped absorber tuned to the machine's own frequency: split frequencies over that frequency,
/// squares 1 + mu/2 -+ sqrt(mu + mu^2/4). Source: Den Hartog Fig. 3.6.
std::array<double, 2> undamped_splits(double mass_ratio);
/// The mass ratio that puts a split at `ratio` (> 0) of the machine's own frequency: (r^2 - 1)^2 / r^2.
double mass_ratio_for_split(double ratio);

/// The undamped absorber that cancels a force with a given travel.
struct Canceller {
  double mass_kg = 0.0;
  double stiffness = 0.0;  ///< N/m
};
/// k = F / travel, m = k / w^2: force amplitude F in N, its frequency in Hz, peak travel in m, all > 0.
Canceller cancel(double force, double frequency_hz, double travel_m);

}  // namespace stillmass::absorber
