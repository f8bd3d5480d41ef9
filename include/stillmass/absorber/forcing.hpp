#pragma once

#include <array>
#include <optional>
#include <string_view>

#include "stillmass/base/interval.hpp"

namespace stillmass::absorber {

/// How the machine is shaken, as a function of the forcing frequency.
enum class Forcing {
  constant,   ///< a force of constant amplitude at one frequency, which may move over a range
  unbalance,  ///< a rotating force, amplitude proportional to frequency squared
  base,       ///< the ground moves, its acceleration of constant amplitude
  random,     ///< a force of constant spectral density (white)
};
std::string_view name(Forcing forcing);
std::optional<Forcing> forcing_named(std::string_view name);

/// What a sizing makes least.
enum class Objective {
  velocity,      ///< absolute velocity of the point: what the standards judge
  displacement,  ///< displacement, as the textbooks do; for `base` that relative to the ground
};
std::string_view name(Objective objective);
std::optional<Objective> objective_named(std::string_view name);

/// The forcing of one machine.
struct ForcingRange {
  Forcing forcing = Forcing::constant;
  base::Interval range_hz;        ///< 0 < lo <= hi; lo == hi: one frequency. For `random` the band in which it matters
  std::optional<double> duty_hz;  ///< where the "before" was measured; absent: the middle of the range

  double duty() const { return duty_hz ? *duty_hz : range_hz.middle(); }
};

}  // namespace stillmass::absorber
