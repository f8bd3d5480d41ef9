#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
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

/// A belt from a driver's sheave to the shaft's own. Diameters are those at which the belt runs (pitch diameters).
struct Belt {
  double driver_sheave_m = 0.0;
  double sheave_m = 0.0;
  std::optional<double> length_m;  ///< along the belt; absent: the belt frequency is not known
};

/// Length of an open belt over two sheaves at this distance of their shafts:
/// 2 C + pi (D + d) / 2 + (D - d)^2 / (4 C), m; from the series of the exact length, true to 0.1 % where D - d < C
/// (common practice). Throws `Error` (usage) where the sheaves would touch or a size is not above 0.
double belt_length(double driver_sheave_m, double sheave_m, double centre_distance_m);

/// A shaft that turns at a fixed ratio to the machine's speed (gear, belt), with the gear wheel or sheave on it.
struct Shaft {
  std::string name;
  double ratio = 1.0;          ///< its speed over the machine's speed
  std::optional<int> teeth{};  ///< of the gear wheel on it
  std::string driven_by{};     ///< name of the shaft that drives it; empty: the machine's own
  std::optional<int> vanes{};  ///< vanes or blades on it
  std::optional<Belt> belt{};  ///< that drives it
  double ratio_u = 0.0;        ///< relative standard uncertainty of the ratio: of a belt, whose slip is not known
};

/// Relative standard uncertainty of a speed ratio taken from sheave diameters: V-belts creep and slip by up to 2 %
/// (common practice).
inline constexpr double belt_slip_u = 0.01;

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
  std::optional<int> vanes;           ///< vanes, blades on the machine's own shaft
  std::optional<Support> foundation;  ///< all directions without an entry of their own
  std::vector<DirectionSupport> foundation_by_direction;
  std::optional<double> shaft_height_m;
  std::optional<double> mass_kg;
  std::optional<double> rotor_mass_kg;
  std::vector<Shaft> shafts;
  std::vector<Bearing> bearings;
  double stopped_shift_frequency = 0.02;  ///< relative standard uncertainty (common practice)
  double stopped_shift_damping = 0.3;
  std::optional<int> rotor_bars;             ///< bars of the motor's cage
  std::optional<double> drive_switching_hz;  ///< switching (carrier) frequency of the drive

  /// Support class of a direction, as declared.
  std::optional<Support> support(std::string_view direction) const;
  /// Ratio of the named shaft (empty name: 1); absent for a name that is not there.
  std::optional<double> shaft_ratio(std::string_view shaft) const;
  /// Its relative standard uncertainty; 0 for the machine's own and for a name that is not there.
  double shaft_ratio_u(std::string_view shaft) const;
  /// Speed of the rotating field, 2 f / poles, Hz; absent where line frequency or poles are not known, and on a drive.
  std::optional<double> synchronous_hz() const;
};

/// Support class from measurement: rigid where lowest_natural_hz >= 1.25 main_forcing_hz (ISO 10816-3, after a public
/// summary of IS 14817-3).
Support support_class(double lowest_natural_hz, double main_forcing_hz);

/// The same from estimates. Refused (`support-unknown`) where the ratio of the two is within 2 u of 1.25, so that the
/// class would be a throw of dice, and where the natural frequency has no uncertainty and lies within 5 % of the limit
/// (common practice). "Lowest" is for the caller to see to: of machine and support, in the direction asked, with the
/// machine fitted to its foundation.
base::Answer<Support> support_class(const base::Estimate& lowest_natural, const base::Estimate& main_forcing);

}  // namespace stillmass::machine
