#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/interval.hpp"

namespace stillmass::machine {

enum class MachineKind { pump, fan, motor, general };
std::string_view name(MachineKind kind);
std::optional<MachineKind> kind_named(std::string_view name);

/// Where the motor's current comes from: the line's fixed frequency, or a drive whose output frequency sets the speed.
enum class Supply { line, drive };
std::string_view name(Supply supply);
std::optional<Supply> supply_named(std::string_view name);

/// Support class of a direction (ISO 10816-3): rigid where the lowest natural frequency of machine and support is at
/// least 1.25 times the main forcing frequency.
enum class Support { flexible, rigid };
std::string_view name(Support support);
std::optional<Support> support_named(std::string_view name);

/// The support class in one direction.
struct DirectionSupport {
  std::string direction;
  Support support = Support::flexible;
};

/// A shaft that turns at a fixed ratio to the machine's speed (gear, belt), with the gear wheel on it.
struct Shaft {
  std::string name;
  double ratio = 1.0;        ///< its speed over the machine's speed
  std::optional<int> teeth;  ///< of the gear wheel on it
};

/// Geometry of a rolling-element bearing.
struct Bearing {
  std::string name;
  int elements = 0;  ///< rolling elements in one row
  double ball_diameter_m = 0.0;
  double pitch_diameter_m = 0.0;
  double contact_angle_rad = 0.0;
  std::string shaft;  ///< name of the shaft it carries; empty: the machine's own
};

/// What is known of the machine. Absent: not known.
struct Machine {
  std::string name;
  MachineKind kind = MachineKind::general;
  std::optional<double> power_w;
  std::optional<base::Interval> speed_hz;  ///< nominal speed or its range, turns per second
  Supply supply = Supply::line;
  std::optional<double> line_frequency_hz;
  std::optional<int> motor_poles;
  std::optional<int> vanes;           ///< vanes, blades
  std::optional<Support> foundation;  ///< all directions without an entry of their own
  std::vector<DirectionSupport> foundation_by_direction;
  std::optional<double> shaft_height_m;
  std::optional<double> mass_kg;
  std::optional<double> rotor_mass_kg;
  std::vector<Shaft> shafts;
  std::vector<Bearing> bearings;
  double stopped_shift_frequency = 0.02;  ///< relative standard uncertainty (common practice)
  double stopped_shift_damping = 0.3;

  /// Support class of a direction, as declared.
  std::optional<Support> support(std::string_view direction) const;
  /// Ratio of the named shaft (empty name: 1); absent for a name that is not there.
  std::optional<double> shaft_ratio(std::string_view shaft) const;
};

/// Support class from measurement: rigid where lowest_natural_hz >= 1.25 main_forcing_hz (ISO 10816-3, after a public
/// summary of IS 14817-3).
Support support_class(double lowest_natural_hz, double main_forcing_hz);

}  // namespace stillmass::machine
