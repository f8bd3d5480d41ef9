#pragma once

#include <array>
#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/severity.hpp"

namespace stillmass::machine {

/// What was measured at one point, in the band of the limits.
struct SeverityLevels {
  base::Estimate velocity;                        ///< broad-band, m/s r.m.s.
  std::optional<base::Estimate> displacement;     ///< broad-band, m r.m.s.
  std::optional<base::Estimate> displacement_pp;  ///< m peak-to-peak
  base::Interval held_hz;                         ///< the part of the band that the spectrum holds
  bool unit_known = true;                         ///< false: unit or sensitivity were assumed
  bool usable = true;                             ///< false: `check` calls the channel unusable
};

/// Which of the levels was judged.
enum class Judged { velocity, displacement, displacement_pp };
/// "velocity r.m.s.", "displacement r.m.s.", "displacement peak-to-peak".
std::string_view name(Judged judged);

/// One level against its three limits.
struct JudgedLevel {
  Judged judged = Judged::velocity;
  base::Estimate value;            ///< SI
  std::array<double, 3> limits{};  ///< A/B, B/C, C/D, SI
  Zone zone = Zone::a;             ///< of the value; on a boundary: the better one
  Zone best = Zone::a;             ///< of value - 2 u
  Zone worst = Zone::a;            ///< of value + 2 u
};

/// The zone of a point: the worse of the levels judged.
struct SeverityVerdict {
  Zone zone = Zone::a;
  std::vector<Zone> could_be;       ///< every zone within 2 u of the levels, best first; one where the zone is sure
  std::vector<JudgedLevel> levels;  ///< velocity first
  std::size_t rules = 0;            ///< which of the levels gives the zone
  double share = 0.0;               ///< its value over the boundary C/D, to put points in order
  /// False where a level has none: then `could_be` takes its value alone, and nothing is sure.
  bool has_uncertainty = true;
};

/// "zone B", "zone B or C".
std::string text(const SeverityVerdict& verdict);

/// The zone of a point. Velocity is judged always, displacement where the standard limits it and it was measured; the
/// worse zone rules, the greater share among equals. 2 u: widened for few degrees of freedom. Refused
/// (`limit-unknown`): unusable channel, unit assumed, band not held (from 1.1 times its lower end at most, to 0.4 of
/// its upper end at least; common practice: what shakes a machine lies below 400 Hz), a displacement that the standard
/// limits and that was not measured, of a machine at 600 r/min or below (there it rules).
base::Answer<SeverityVerdict> judge(const SeverityLimits& limits, const SeverityLevels& levels);

/// Typical ranges of the zone boundaries that ISO 20816-1:2016 (ISO 10816-1 Amd 1:2009) quotes for any machine: they
/// overlap, so a value need not have one zone.
struct TypicalRanges {
  std::string standard;
  std::array<base::Interval, 3> boundary;  ///< A/B, B/C, C/D, m/s r.m.s.
  std::string source;
};
TypicalRanges typical_ranges();

enum class Place { below, within, above };
/// "below", "within", "above".
std::string_view name(Place place);

/// A level against the typical ranges: never a single zone unless the ranges leave no other.
struct RangeVerdict {
  std::array<Place, 3> place{};  ///< in the range of A/B, of B/C, of C/D
  Zone best = Zone::a;           ///< boundaries certainly passed (at value - 2 u)
  Zone worst = Zone::a;          ///< boundaries possibly passed (at value + 2 u)
  std::string text;              ///< "within the range of A/B and B/C: zone A to C, not decided"
};
RangeVerdict against_ranges(const TypicalRanges& ranges, const base::Estimate& velocity);

/// The plant's own limits of broad-band r.m.s. velocity, m/s. Absent: not set.
struct PlantLimits {
  std::optional<double> target;  ///< what it should be
  std::optional<double> alarm;   ///< from which somebody must look
  std::optional<double> trip;    ///< from which the machine is stopped
};

enum class PlantState { within, above_target, above_alarm, above_trip };
/// "within the limits", "above target", "above alarm", "above trip".
std::string_view name(PlantState state);

/// A level against the plant's own limits.
struct PlantVerdict {
  PlantState state = PlantState::within;
  std::vector<PlantState> could_be;  ///< every state within 2 u, best first
  std::optional<double> over;        ///< value over the lowest limit that is set
};
/// Absent where no limit is set. A value on a limit is not above it.
std::optional<PlantVerdict> against_plant(const PlantLimits& limits, const base::Estimate& velocity);

/// The point that is worst: by zone, then by the value over its own boundary C/D. Absent where there is none.
std::optional<std::size_t> worst_point(std::span<const SeverityVerdict> points);

}  // namespace stillmass::machine
