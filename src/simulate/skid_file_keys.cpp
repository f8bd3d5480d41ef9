#include <array>

#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {
namespace {

using base::Interval;
using base::Key;
using base::KeyType;

constexpr Interval positive{1e-12, 1e15};
constexpr Interval not_negative{0.0, 1e15};
constexpr Interval fraction{0.0, 1.0};

// path, type, unit, required, default, help, allowed, range
constexpr auto keys = std::to_array<Key>({
    {"name", KeyType::text, "", true, "", "what the skid is called", "", {}},
    {"seed", KeyType::integer, "", true, "", "of the random numbers", "", {0.0, 2147483647.0}},

    {"drive", KeyType::table, "", true, "", "speed of the machine", "", {}},
    {"drive.speed_rpm", KeyType::number, "rpm", true, "", "rated speed", "", positive},
    {"drive.line_frequency_hz", KeyType::number, "Hz", false, "50", "of the supply", "", positive},
    {"drive.wander", KeyType::number, "", false, "0", "greatest relative deviation of the speed", "", {0.0, 0.1}},
    {"drive.coast_time_s", KeyType::number, "s", false, "0.5", "angular momentum over torque at rated speed", "",
     positive},
    {"drive.friction_rpm_per_s", KeyType::number, "rpm/s", false, "60", "deceleration by the bearings", "", positive},

    {"structure", KeyType::table, "", true, "", "the skid as a whole", "", {}},
    {"structure.running_shift",
     KeyType::number,
     "",
     false,
     "0",
     "relative rise of the supports' frequency while running",
     "",
     {-0.2, 0.2}},
    {"structure.damping_ratios",
     KeyType::numbers,
     "",
     true,
     "",
     "of the modes, rising frequency; the last holds for the rest",
     "",
     {1e-6, 0.99}},

    {"tacho", KeyType::table, "", false, "", "the once-per-turn pulse", "", {}},
    {"tacho.angle_deg", KeyType::number, "deg", false, "0", "of the rotor where the pulse rises", "", {-360.0, 360.0}},
    {"tacho.width", KeyType::number, "", false, "0.1", "of the pulse, in turns", "", {0.001, 0.999}},

    {"body", KeyType::tables, "", true, "", "a rigid body", "", {}},
    {"body.name", KeyType::text, "", true, "", "", "", {}},
    {"body.mass_kg", KeyType::number, "kg", true, "", "", "", positive},
    {"body.centre_m", KeyType::numbers, "m", true, "", "centre of mass [x, y, z]", "", {-1e3, 1e3}},
    {"body.inertia_kg_m2", KeyType::numbers, "kg m2", true, "", "about its own axes x, y, z", "", positive},

    {"spring", KeyType::tables, "", true, "", "a spring between bodies or to the ground", "", {}},
    {"spring.body", KeyType::text, "", true, "", "name of a body", "", {}},
    {"spring.to", KeyType::text, "", false, "ground", "name of another body, or \"ground\"", "", {}},
    {"spring.at_m", KeyType::numbers, "m", true, "", "[x, y, z]", "", {-1e3, 1e3}},
    {"spring.stiffness_n_per_m", KeyType::numbers, "N/m", true, "", "along x, y, z", "", not_negative},

    {"point", KeyType::tables, "", true, "", "a place and a direction", "", {}},
    {"point.name", KeyType::text, "", true, "", "", "", {}},
    {"point.body", KeyType::text, "", true, "", "name of a body", "", {}},
    {"point.at_m", KeyType::numbers, "m", true, "", "[x, y, z]", "", {-1e3, 1e3}},
    {"point.direction", KeyType::text, "", true, "", "signed axis", "+x|-x|+y|-y|+z|-z", {}},

    {"force", KeyType::tables, "", false, "", "a force on a body", "", {}},
    {"force.kind", KeyType::text, "", true, "", "", "unbalance|order|line|flow|ambient|neighbour", {}},
    {"force.body", KeyType::text, "", true, "", "name of a body", "", {}},
    {"force.at_m", KeyType::numbers, "m", true, "", "[x, y, z]", "", {-1e3, 1e3}},
    {"force.unbalance_g_mm", KeyType::number, "g mm", false, "0", "of kind unbalance", "", not_negative},
    {"force.amplitude_n",
     KeyType::numbers,
     "N",
     false,
     "",
     "[x, y, z]; of kinds order (at rated speed), line and neighbour",
     "",
     {-1e9, 1e9}},
    {"force.density_n_per_rthz", KeyType::numbers, "N/sqrt(Hz)", false, "", "[x, y, z]; of kinds flow and ambient", "",
     not_negative},
    {"force.multiple", KeyType::number, "", false, "1", "of the running or the line frequency", "", positive},
    {"force.frequency_hz", KeyType::number, "Hz", false, "", "of kind neighbour", "", positive},
    {"force.phase_deg", KeyType::number, "deg", false, "0", "", "", {-360.0, 360.0}},
    {"force.corner_hz", KeyType::number, "Hz", false, "500", "of kinds flow and ambient", "", positive},

    {"absorber", KeyType::table, "", false, "", "the absorber of the recordings with fitted = true", "", {}},
    {"absorber.point", KeyType::text, "", true, "", "name of a point", "", {}},
    {"absorber.mass_kg", KeyType::number, "kg", true, "", "", "", positive},
    {"absorber.frequency_hz", KeyType::number, "Hz", true, "", "on a clamp", "", positive},
    {"absorber.damping_ratio", KeyType::number, "", true, "", "", "", fraction},

    {"hammer", KeyType::table, "", false, "", "the blows of recordings of kind bump", "", {}},
    {"hammer.point", KeyType::text, "", true, "", "name of a point", "", {}},
    {"hammer.peak_n", KeyType::number, "N", true, "", "", "", positive},
    {"hammer.spread", KeyType::number, "", false, "0", "relative standard deviation of the peaks", "", {0.0, 0.3}},
    {"hammer.tip_ms", KeyType::number, "ms", true, "", "duration of a blow", "", positive},
    {"hammer.first_s", KeyType::number, "s", false, "1", "instant of the first blow", "", not_negative},
    {"hammer.interval_s", KeyType::number, "s", true, "", "", "", positive},
    {"hammer.blows", KeyType::integer, "", true, "", "", "", {1.0, 1000.0}},
    {"hammer.double_hit", KeyType::integer, "", false, "0", "number of the blow that bounces", "", {0.0, 1000.0}},
    {"hammer.bounce_ms", KeyType::number, "ms", false, "45", "", "", positive},
    {"hammer.bounce_ratio", KeyType::number, "", false, "0.4", "", "", fraction},
    {"hammer.overload", KeyType::integer, "", false, "0", "number of the blow that is too hard", "", {0.0, 1000.0}},
    {"hammer.overload_ratio", KeyType::number, "", false, "2", "its peak over peak_n", "", positive},

    {"sensor", KeyType::tables, "", true, "", "a sensor with its cable", "", {}},
    {"sensor.name", KeyType::text, "", true, "", "", "", {}},
    {"sensor.unit", KeyType::text, "", true, "", "", "g|m/s2|N|tacho", {}},
    {"sensor.sensitivity_mv_per_unit", KeyType::number, "mV", true, "", "of its data sheet", "", positive},
    {"sensor.sensitivity_error", KeyType::number, "", false, "0", "relative, unknown to the survey", "", {-0.5, 0.5}},
    {"sensor.noise_per_rthz", KeyType::number, "", false, "0", "its unit per sqrt(Hz)", "", not_negative},
    {"sensor.low_corner_hz", KeyType::number, "Hz", false, "0", "0: none", "", not_negative},

    {"recording", KeyType::tables, "", true, "", "a recording to be made", "", {}},
    {"recording.file", KeyType::text, "", true, "", "NAME.wav or NAME.csv", "", {}},
    {"recording.kind", KeyType::text, "", true, "", "", "steady|coastdown|background|bump|calibrator|hung-mass", {}},
    {"recording.rate_hz", KeyType::number, "Hz", true, "", "", "", {1.0, 1e6}},
    {"recording.duration_s", KeyType::number, "s", true, "", "", "", {1e-3, 1e5}},
    {"recording.hung_mass_kg", KeyType::number, "kg", false, "", "of kind hung-mass, with the sensor on it", "",
     positive},
    {"recording.switch_off_s", KeyType::number, "s", false, "0", "of kind coastdown", "", not_negative},
    {"recording.bits", KeyType::integer, "", false, "16", "of the recorder", "", {2.0, 24.0}},
    {"recording.fitted", KeyType::flag, "", false, "false", "with the absorber", "", {}},
    {"recording.separator", KeyType::text, "", false, ",", "of a CSV", ",|;", {}},
    {"recording.decimal", KeyType::text, "", false, ".", "of a CSV", ".|,", {}},
    {"recording.decimals", KeyType::integer, "", false, "5", "of a CSV's samples", "", {0.0, 17.0}},
    {"recording.header", KeyType::texts, "", false, "", "lines above a CSV's row of names", "", {}},
    {"recording.channel", KeyType::tables, "", true, "", "", "", {}},
    {"recording.channel.role", KeyType::text, "", false, "vibration", "", "vibration|force|tacho", {}},
    {"recording.channel.point", KeyType::text, "", false, "", "of a vibration", "", {}},
    {"recording.channel.sensor", KeyType::text, "", true, "", "name of a sensor", "", {}},
    {"recording.channel.full_scale_v", KeyType::number, "V", false, "5", "of the recorder", "", positive},
});

}  // namespace

std::span<const base::Key> skid_file_keys() { return keys; }

}  // namespace stillmass::simulate
