#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/description.hpp"
#include "stillmass/machine/forcing.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::machine {

/// A peak with its cause, at one channel.
struct CausedPeak {
  std::string channel;
  Peak peak;  ///< amplitude: r.m.s. velocity, m/s
  Cause cause;
};

/// Broad-band r.m.s. velocity of a channel, m/s.
struct ChannelLevel {
  std::string channel;
  double velocity = 0.0;
};

/// What has been measured of the running machine.
struct Facts {
  Machine machine;
  std::vector<Forcing> forcing;  ///< the list that the causes refer to
  std::vector<CausedPeak> peaks;
  std::vector<ChannelLevel> levels;
  std::vector<modal::Mode> modes;
};

/// Limits of the rules, from data/tables/diagnosis.toml.
struct DiagnosisRules {
  double dominance_strong = 0.0;  ///< share of a channel's level (amplitudes) from which a line dominates
  double dominance_fair = 0.0;
  double amplification_strong = 0.0;  ///< from which a resonance governs
  double amplification_fair = 0.0;
  double near_bandwidths = 0.0;  ///< distance to a mode, in half-power bandwidths, for `strong`
};
DiagnosisRules diagnosis_rules();

/// How much a mode multiplies the response to a force of constant amplitude: |1 / (1 - r^2 + i 2 zeta r)|, r = f / f_n.
double amplification(double frequency_hz, double natural_hz, double damping_ratio);
/// Least and greatest amplification while the mode's frequency lies within +- 2 u.
base::Interval amplification_range(double frequency_hz, const modal::Mode& mode);

/// Findings with evidence, strongest first: `unbalance` (1x dominates; at most fair where a mode multiplies it),
/// `resonance` (a forcing line near a mode: amplification and distance in % stated), `vane_pass_force`,
/// `electrical_force` (twice line frequency). One finding for a cause, on the channel where it is largest.
std::vector<base::Finding> diagnose(const Facts& facts, const DiagnosisRules& rules);

}  // namespace stillmass::machine
