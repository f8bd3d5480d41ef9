#pragma once

#include <string>

#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::tests {

/// One body on two springs that lets it move crosswise at 20 Hz (other directions at 70 Hz and more), with a point in
/// its centre of mass: 100 kg, damping ratio 2 %, rated speed 18 Hz. Only what the caller adds drives it.
inline std::string one_body(const std::string& more) {
  return R"(
name = "one body"
seed = 3
[drive]
speed_rpm = 1080
[structure]
damping_ratios = [0.02]
[[body]]
name = "block"
mass_kg = 100
centre_m = [0, 0, 0]
inertia_kg_m2 = [4, 4, 4]
[[spring]]
body = "block"
at_m = [0.5, 0.5, 0.5]
stiffness_n_per_m = [1e7, 394784.17604357434, 1e7]
[[spring]]
body = "block"
at_m = [0.5, -0.5, -0.5]
stiffness_n_per_m = [1e7, 394784.17604357434, 1e7]
[[spring]]
body = "block"
at_m = [-0.5, 0.5, -0.5]
stiffness_n_per_m = [1e7, 394784.17604357434, 1e7]
[[spring]]
body = "block"
at_m = [-0.5, -0.5, 0.5]
stiffness_n_per_m = [1e7, 394784.17604357434, 1e7]
[[point]]
name = "centre"
body = "block"
at_m = [0, 0, 0]
direction = "+y"
[[sensor]]
name = "ideal"
unit = "m/s2"
sensitivity_mv_per_unit = 1000
[[sensor]]
name = "force"
unit = "N"
sensitivity_mv_per_unit = 1000
[[sensor]]
name = "pulse"
unit = "tacho"
sensitivity_mv_per_unit = 1000
)" + more;
}

/// A recording of the centre with one unit of full scale, so that the fractions are m/s2.
inline std::string recording(const std::string& kind, double rate_hz, double duration_s, const std::string& more = {}) {
  return "[[recording]]\nfile = \"a.wav\"\nkind = \"" + kind + "\"\nrate_hz = " + std::to_string(rate_hz) +
         "\nduration_s = " + std::to_string(duration_s) + "\nbits = 24\n" + more +
         "[[recording.channel]]\npoint = \"centre\"\nsensor = \"ideal\"\nfull_scale_v = 1\n";
}

inline simulate::SkidFile parsed(const std::string& text) { return simulate::parse_skid_file(text, "test.toml"); }

}  // namespace stillmass::tests
