#pragma once

#include <optional>
#include <string_view>
#include <vector>

#include "stillmass/absorber/forcing.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

enum class RemedyKind {
  less_force,    ///< balance, align: amount = force left over force now
  stiffen,       ///< amount = relative change of the natural frequency upwards
  soften,        ///< amount = relative change of the natural frequency downwards (negative)
  add_mass,      ///< amount = rigid mass at the point, kg
  add_damping,   ///< amount = damping ratio of the mode
  lower_speed,   ///< amount = forcing frequency, Hz
  higher_speed,  ///< amount = forcing frequency, Hz
};
std::string_view name(RemedyKind kind);

/// One other way to bring the forcing line down, by the model of one mode.
struct Remedy {
  RemedyKind kind = RemedyKind::less_force;
  base::Quantity quantity = base::Quantity::ratio;  ///< of `amount`
  std::optional<double> amount;  ///< the least that brings the line to `allowed_rms`; absent: no amount within the
                                 ///< limits does
  double component_rms = 0.0;    ///< line at the duty frequency with that amount (or with the limit), m/s r.m.s.
};

/// All remedies side by side, for the forcing line at the duty frequency. line_rms: before; allowed_rms (> 0): what the
/// target leaves for the line. Limits tried: natural frequency -40 % to +100 %, mass up to the modal mass, damping
/// ratio up to 0.2, speed -30 % to +30 %. Not for random forcing: throws `Error` (usage).
std::vector<Remedy> remedies(const modal::OneMode& machine, const ForcingRange& forcing, double line_rms,
                             double allowed_rms);

}  // namespace stillmass::absorber
