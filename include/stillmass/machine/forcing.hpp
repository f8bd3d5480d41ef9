#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/machine/cause.hpp"
#include "stillmass/machine/description.hpp"
#include "stillmass/machine/running_speed.hpp"

namespace stillmass::machine {

enum class ForcingKind {
  rotation,    ///< orders of a shaft; half orders (0.5, 1.5, 2.5) speak of looseness
  vane_pass,   ///< vanes times the speed of their shaft, and its double
  electrical,  ///< twice the electrical frequency (line or drive) and its double: the motor's magnetic pull
  pole_pass,   ///< side bands at the pole-pass or slip frequency around 1x and twice the electrical frequency
  gear_mesh,   ///< teeth times speed, to 3x, with side bands at the speeds of both shafts
  bearing,     ///< of rolling bearings, to 3x
  belt,        ///< turns of a belt, and their double
  line,        ///< the electrical frequency itself: rarely a force, often hum in the cable
  rotor_bar,   ///< bars times the motor's speed, with side bands at twice the electrical frequency
  switching,   ///< the drive's carrier
};
/// "rotation", "vane pass", "electrical", "pole pass", "gear mesh", "bearing", "belt", "line", "rotor bar",
/// "switching".
std::string_view name(ForcingKind kind);

/// A frequency at which the machine pushes.
struct Forcing {
  std::string name;  ///< "1x", "vane pass (6x)", "twice line frequency", "1x - pole pass", ...
  ForcingKind kind = ForcingKind::rotation;
  base::Estimate frequency;     ///< Hz
  std::optional<double> order;  ///< over the running speed, where it follows the speed
  std::string shaft{};          ///< whose turning makes it; empty: the machine's own, or none
  int harmonic = 1;             ///< k of k times its fundamental ("2x": 2)
  int side_band = 0;            ///< below (-1) or above (+1) its carrier; 0: no side band
  std::string of{};             ///< name of what it is a harmonic or side band of; empty: it is a fundamental
  std::string part{};           ///< of a bearing: "6205"; of a shaft's belt or gear: that shaft
  /// Which counts where several fit a peak: 0 before 1 before 2. 0: orders, vane pass, twice line frequency, gear mesh,
  /// bearing and belt frequencies; 1: side bands, harmonics of gear mesh, bearings and belts, line frequency, rotor
  /// bars; 2: half orders, slip side bands.
  int rank = 0;
};

/// All forcing frequencies of the machine at this running speed (Hz, with u), ascending. u joins that of the speed with
/// those below. Where two are the same by definition, the first of this list stands alone.
///
/// Orders: 1x to `harmonics` of the machine's shaft, 1x to 3x of the others, 0.5x, 1.5x, 2.5x of the machine's. Vane
/// pass and its double, on every shaft with vanes, in place of the harmonic of the same order.
///
/// Twice the line frequency and its double, and the line frequency itself; u 0.02 Hz (common practice for a public
/// grid). Slip frequency = line frequency - poles/2 speed; pole pass = poles times (synchronous speed - speed) = twice
/// the slip frequency. Side bands: pole pass around 1x and around twice line frequency, slip frequency around 1x;
/// only where the speed lies within 8 % under the synchronous one.
///
/// On a drive the electrical frequency is that of the speed, poles / 2 times speed, plus up to 3 % slip (common
/// practice); slip and pole-pass bands are left out, since the slip is not known well enough to part them from 1x. The
/// drive's switching frequency where it is known, u 1 % (common practice).
///
/// Rotor bars: bars times speed, and its side bands at -+ twice the electrical frequency.
///
/// Belt frequency pi D n / L (u 1 %: where the belt runs on its sheaves, common practice) and its double. Gear mesh 1x
/// to 3x with side bands of 1x at the speeds of both shafts. Bearings: 1 % added to u for slip (common practice), each
/// frequency to 3x.
std::vector<Forcing> forcing_frequencies(const Machine& machine, const base::Estimate& speed, int harmonics = 6);

/// Two forcing frequencies that a spectrum should part.
struct ClosePair {
  double distance_hz = 0.0;
  std::string lower;  ///< names
  std::string upper;
};

/// The two nearest neighbours among the frequencies that a diagnosis must tell apart at about this speed (Hz): orders,
/// vane pass, twice electrical frequency, line frequency, pole-pass bands; absent where there are no two. Those closer
/// than `least_hz` coincide for any recording of reasonable length and are passed over, and so are half orders, slip
/// bands, bearings, belts and gears (their neighbours are far away or cannot be parted). Under a Hann window lines a
/// quarter of the distance apart part two tones: its main lobe is 4 lines wide (Harris, Proc. IEEE 66(1), 1978).
std::optional<ClosePair> smallest_distance(const Machine& machine, double speed_hz, double least_hz = 0.1);

}  // namespace stillmass::machine
