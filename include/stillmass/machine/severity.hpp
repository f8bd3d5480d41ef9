#pragma once

#include <array>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/description.hpp"

namespace stillmass::machine {

enum class Zone { a, b, c, d };
/// "A" to "D".
std::string_view name(Zone zone);

/// One line of a standard's table.
struct SeverityRow {
  std::string standard;                                      ///< "ISO 10816-3"
  std::string category;                                      ///< "group 2", "category I", "class III"
  std::optional<Support> support;                            ///< absent: both
  base::Interval power_w;                                    ///< above lo, up to hi
  std::optional<base::Interval> shaft_height_m;              ///< decides in place of the power where it is known
  std::array<double, 3> velocity_limits{};                   ///< A/B, B/C, C/D, m/s r.m.s.
  std::optional<std::array<double, 3>> displacement_limits;  ///< m r.m.s.
  std::string source;                                        ///< with "from memory" where the standard was not at hand
  std::optional<std::array<double, 3>> slow_limits{};        ///< m peak-to-peak, for speeds below 600 r/min
  std::string slow_source{};
};

/// The rows of data/tables/severity.toml.
std::vector<SeverityRow> severity_table();

/// The limits that apply to one point and direction.
struct SeverityLimits {
  std::string standard;
  std::string category;
  std::optional<Support> support;
  std::array<double, 3> velocity{};                   ///< A/B, B/C, C/D, m/s r.m.s.
  std::optional<std::array<double, 3>> displacement;  ///< m r.m.s.
  base::Interval band_hz{10.0, 1000.0};               ///< 2 to 1000 Hz for speeds of 600 r/min and below (from memory)
  std::string source;
  std::optional<std::array<double, 3>> displacement_pp{};  ///< m peak-to-peak (ISO 10816-7 below 600 r/min)
  std::string displacement_pp_source{};
  std::string note{};  ///< what to know before relying on it ("pumps went to ISO 10816-7 in 2009"); may be empty
};

struct SeverityQuestion {
  std::string standard;  ///< empty: ISO 10816-7 for a pump, ISO 10816-3 otherwise
  std::string category;  ///< empty: from the machine where the standard allows
  std::string direction;
  bool on_bearing_housing = false;
  std::optional<Support> support;  ///< measured; absent: as the machine declares for the direction
};

/// Refused (`limit-unknown`): not on a bearing housing, support class unknown, category needed and not said (ISO
/// 10816-7; ISO 10816-3 for a pump: group 3 with a separate, group 4 with an integrated driver), power or speed unknown
/// or outside the standard, ISO 20816-1 (ranges, not limits: `typical_ranges`). Throws `Error` (usage) for a standard
/// or category that is not in the table. Machines with a vertical shaft, reciprocating machines, gas and steam turbines
/// and hydro sets are outside these tables, and the program does not ask: they are the user's to keep out.
base::Answer<SeverityLimits> severity_limits(const Machine& machine, const SeverityQuestion& question);

/// The zone of a broad-band r.m.s. velocity (m/s), and displacement (m) where both are limited: the worse of the two. A
/// value on a boundary belongs to the better zone.
Zone zone(const SeverityLimits& limits, double velocity, std::optional<double> displacement = {});

}  // namespace stillmass::machine
