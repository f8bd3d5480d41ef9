#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/speed_curve.hpp"

namespace stillmass::rotation {

struct PowerCutOptions {
  std::size_t channel = 0;         ///< position in `Recording::channels`
  double electrical_hz = 100.0;    ///< twice the line frequency; the line itself is looked for within 0.3 %
  std::optional<double> speed_hz;  ///< running speed before the cut, to follow the 1x line where there is no tacho
  std::optional<base::Interval> time_s;  ///< part of the recording; absent: all of it
  double block_s = 0.2;                  ///< length of the Hann window: what it sees is +-2 / block_s Hz wide
};

/// What became of the line when the power was cut.
enum class PowerCutVerdict {
  electrical,  ///< confirmed: the line fell at once, and nothing at its order went on with the speed
  mechanical,  ///< refuted: its vibration goes on and follows the speed down
  cannot_tell
};
/// "electrical", "mechanical", "cannot tell".
std::string_view name(PowerCutVerdict verdict);

/// The track behind the verdict, for a picture: from 3 s before the cut to 5 s after it.
struct PowerCutTrack {
  std::vector<double> time_s;        ///< middle of the window
  std::vector<double> at_frequency;  ///< r.m.s. at the electrical frequency
  std::vector<double> at_order;      ///< r.m.s. at the order that frequency had before the cut
  std::vector<double> speed_hz;
};

/// The test by switching off: a force of the motor's field ends with the current, one of the turning rotor does not.
struct PowerCut {
  PowerCutVerdict verdict = PowerCutVerdict::cannot_tell;
  std::string reason;           ///< one sentence with the numbers
  base::Estimate cut_s;         ///< when the line fell; of `cannot_tell` when the speed began to fall
  base::Estimate frequency;     ///< of the line before the cut, Hz
  base::Estimate before_rms;    ///< SI unit of the channel
  base::Estimate after_rms;     ///< at the same frequency, from one window after the cut on
  base::Estimate followed_rms;  ///< after the cut at the order the line had: what is mechanical goes on here
  double noise_rms = 0.0;       ///< beside the line, after the cut, in the same window
  base::Estimate
      fall_s;  ///< from 90 % to 10 % of the fall; no shorter than half the window. Without u: no longer than that
  double speed_before_hz = 0.0;
  double speed_after_fall_hz = 0.0;  ///< when the line had fallen
  PowerCutTrack track;
};

/// The line at twice the line frequency through a coast-down: complex base band under a Hann window of `block_s`, at a
/// fixed frequency, and at the order that this frequency had before the cut (along the speed curve, or the 1x line
/// followed by its own phase where there is none). Before the cut up to 10 s of windows are joined to one long one, so
/// that orders beside the line are told from it. The cut: where the speed curve leaves its level (a straight line back
/// through 99 and 97 % of it), and about there the best step of the line's amplitude, if that halves it. Streams; holds
/// 15 s of readings.
///
/// Electrical: before the cut at least 4 times the noise beside it, and of that less than a quarter (or twice the
/// noise) goes on at its order from three quarters of a window after the cut on, once the speed has fallen by 1 %.
/// Mechanical: more than half goes on, the square of the slowing allowed for (unbalance). Between: cannot tell. Nor
/// where a whole order of the speed stands apart from the line inside the window's lobe, half as strong or more (2x of
/// a two-pole motor): after the cut it cannot be told from the line. A whole order on the line itself is no hindrance:
/// what is mechanical of it goes on. Nor where the line is gone before the speed begins to fall. Limits: common
/// practice, held against simulated coast-downs both ways.
///
/// Refused: `no-power-cut` (the speed does not fall by 3 % in this part, or less than two windows before or four after
/// the cut), `no-tacho` (neither a curve nor a speed, or the 1x line cannot be followed down
/// to 90 % of the speed: a structure that rings near 1x hides it). Throws `Error` (usage) for a
/// channel that is not there and a frequency above 0.4 of the rate.
base::Answer<PowerCut> power_cut(const recording::Reader& reader, const PowerCutOptions& options,
                                 const SpeedCurve* curve, const base::Context& context);

}  // namespace stillmass::rotation
