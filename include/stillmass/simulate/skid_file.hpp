#pragma once

#include <array>
#include <cstdint>
#include <filesystem>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/settings.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/channel.hpp"
#include "stillmass/recording/writer.hpp"

namespace stillmass::simulate {

/// x along the shaft, y crosswise and level, z up; m, N, N/m, ...
using Vector3 = std::array<double, 3>;

/// A rigid body: six degrees of freedom about its centre of mass, principal axes along x, y, z.
struct Body {
  std::string name;
  double mass_kg = 0.0;
  Vector3 centre_m{};
  Vector3 inertia_kg_m2{};
};

/// A spring at one place, with a stiffness along each axis, from a body to another or to the ground.
struct Spring {
  std::size_t body = 0;
  std::optional<std::size_t> other;  ///< absent: the ground
  Vector3 at_m{};
  Vector3 stiffness_n_per_m{};
};

/// A place on a body and a direction (unit vector): where a sensor sits, a hammer hits or an absorber hangs.
struct Point {
  std::string name;
  std::size_t body = 0;
  Vector3 at_m{};
  Vector3 direction{};
};

/// Speed of the machine. Steady: speed_hz times 1 + wander, a slow sum of sines of at most `wander`. Coast-down:
/// dw/dt = -w^2 / (w0 T) - b, a pump's torque with the square of the speed, then the friction of the bearings.
struct Drive {
  double speed_hz = 0.0;
  double line_hz = 0.0;
  double wander = 0.0;             ///< greatest relative deviation
  double coast_time_s = 0.0;       ///< T = J w0 / torque
  double friction_hz_per_s = 0.0;  ///< b / (2 pi)
};

enum class ForceKind {
  unbalance,  ///< m e (w^2 cos, w^2 sin) in the plane y, z; with the tangential term of a changing speed
  order,      ///< amplitude * (w/w0)^2 * cos(multiple * angle + phase)
  line,       ///< amplitude * cos(2 pi multiple * line frequency * t + phase) while the motor is on
  flow,       ///< broad-band, density * (w/w0)^2, each axis for itself
  ambient,    ///< broad-band, density, whether the machine runs or not
  neighbour,  ///< amplitude * cos(2 pi frequency t + phase), of a machine beside this one; still during hammer tests
};

struct Force {
  ForceKind kind = ForceKind::unbalance;
  std::size_t body = 0;
  Vector3 at_m{};
  double unbalance_kg_m = 0.0;
  Vector3 amplitude{};  ///< N; of broad-band forces: N/sqrt(Hz), one-sided, at low frequency
  double multiple = 1.0;
  double frequency_hz = 0.0;  ///< of kind neighbour
  double phase_rad = 0.0;
  double corner_hz = 0.0;  ///< broad-band: density falls as 1 / (1 + (f/corner)^2)
};

struct FittedAbsorber {
  std::size_t point = 0;
  double mass_kg = 0.0;
  double frequency_hz = 0.0;   ///< on a clamp
  double damping_ratio = 0.0;  ///< c / (2 sqrt(k m))
};

/// Half-sine blows on the stopped machine. Blow numbers count from 1; 0: none.
struct Hammer {
  std::size_t point = 0;
  double peak_n = 0.0;
  double spread = 0.0;  ///< relative standard deviation of the peaks
  double tip_s = 0.0;   ///< duration of a blow
  double first_s = 0.0;
  double interval_s = 0.0;
  int blows = 0;
  int double_hit = 0;  ///< this one bounces: a second, weaker blow follows
  double bounce_s = 0.045;
  double bounce_ratio = 0.4;
  int overload = 0;             ///< this one exceeds the recorder's full scale
  double overload_ratio = 1.0;  ///< its peak over peak_n
};

/// One physical sensor with its cable. volts = (signal in `unit`) * sensitivity * (1 + sensitivity_error).
struct Sensor {
  std::string name;
  base::Unit unit;
  double sensitivity_v = 0.0;      ///< V per `unit`, as its data sheet says
  double sensitivity_error = 0.0;  ///< what the data sheet does not know
  double noise = 0.0;              ///< white, `unit`/sqrt(Hz), one-sided
  double low_corner_hz = 0.0;      ///< first-order high-pass; 0: none
};

struct PlannedChannel {
  recording::Role role = recording::Role::vibration;
  std::size_t point = 0;  ///< of the vibration; of force and tacho unused
  std::size_t sensor = 0;
  double full_scale_v = 1.0;
};

enum class RecordingKind {
  steady,
  coastdown,
  background,  ///< the machine stands, its neighbours run
  bump,
  calibrator,  ///< the sensors on a handheld exciter: 10 m/s2 r.m.s. at 1000 rad/s
  hung_mass,   ///< a free mass struck by the hammer: acceleration = force / mass
};

struct PlannedRecording {
  std::string file;
  RecordingKind kind = RecordingKind::steady;
  double rate_hz = 0.0;
  double duration_s = 0.0;
  double switch_off_s = 0.0;  ///< coast-down: when the motor is switched off
  double hung_mass_kg = 0.0;  ///< of kind hung_mass
  int bits = 16;
  bool fitted = false;                     ///< with the absorber
  std::optional<recording::CsvStyle> csv;  ///< absent: WAV
  std::vector<PlannedChannel> channels;
};

/// A virtual skid and the recordings to be made of it.
struct SkidFile {
  std::string name;
  std::uint64_t seed = 0;
  Drive drive;
  double running_shift =
      0.0;  ///< natural frequencies on stiffer supports while running: grounded springs * (1 + shift)^2
  std::vector<double> damping_ratios;  ///< of the modes in ascending order; the last one holds for the rest
  double tacho_angle_rad = 0.0;        ///< of the rotor where the pulse rises
  double tacho_width = 0.1;            ///< of a turn
  std::vector<Body> bodies;
  std::vector<Spring> springs;
  std::vector<Point> points;
  std::vector<Force> forces;
  std::optional<FittedAbsorber> absorber;
  std::optional<Hammer> hammer;
  std::vector<Sensor> sensors;
  std::vector<PlannedRecording> recordings;
};

/// Every key of a skid file, once.
std::span<const base::Key> skid_file_keys();

/// Throws `Error`: kind `file` where it cannot be read, `usage` with line where its content is wrong.
SkidFile read_skid_file(const std::filesystem::path& file);
/// The same from text; `name` stands for the file in errors.
SkidFile parse_skid_file(std::string_view text, const std::string& name);

}  // namespace stillmass::simulate
