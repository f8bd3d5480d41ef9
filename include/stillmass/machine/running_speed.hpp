#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/cause.hpp"
#include "stillmass/machine/description.hpp"

namespace stillmass::machine {

/// A line that the speed was taken from, or that was looked at and left out.
struct SpeedLine {
  std::size_t peak = 0;      ///< position in the peaks given
  double order = 1.0;        ///< k of k times the speed
  double residual_hz = 0.0;  ///< its frequency less order times the speed
  bool used = false;         ///< false: further off than its uncertainty and the scatter of the others allow
};

/// The running speed with the lines that support it.
struct RunningSpeed {
  base::Estimate speed;          ///< mean over the recording, turns per second
  std::vector<SpeedLine> lines;  ///< by order, then channel
  double wander = 0.0;           ///< relative standard deviation of the speed within the recording, from the breadth of
                                 ///< the lines; 0: none seen
  base::Interval searched_hz;    ///< where the speed was looked for
};

/// Where the speed can be: the declared range; for an induction motor on the line [0.92, 0.9995] of the synchronous
/// speed where the nominal speed lies there (full-load slip of small motors, common practice), within 3 % of the
/// nominal speed; nominal +- 3 % otherwise; the motor's slip range where only line frequency and poles are known.
/// Absent where nothing is known.
std::optional<base::Interval> possible_speeds(const Machine& machine);

/// The running speed from the lines of all channels together: weighted least squares of f = k n over the orders 1, 2,
/// 3, vane pass and its double that are matched, upwards, each within max(one line, 3 u) of the speed so far. Start:
/// the strongest line in `possible_speeds` (amplitudes summed over channels). Of those within 6 dB the one with more
/// orders counts; a weaker one (to 5 %) only with two orders more. Without a line at 1x two other orders that agree
/// stand in for it. Of an induction motor on the line, the line frequency and its multiples are never taken.
///
/// Lines and orders that scatter more than chance allows lose the one without which the rest agrees best, while more
/// than half are left: a foreign line near one order is left out, whatever its strength.
///
/// u: from the lines' own, widened by their scatter (Birge; Student's t where it is more than chance), so that +- 2 u
/// holds 95 %; joined with a part that does not average out, half the wander seen in the breadth of the lines. A line
/// spread by a standard deviation s is sqrt(1 + (s / 0.6 lines)^2) broad (a Hann window's lobe taken as a Gaussian of
/// its noise bandwidth). Lines without u count as line_hz / sqrt 12.
///
/// line_hz: spacing of the spectrum's lines, > 0. Refused (`speed-unknown`): nothing known of the speed, no line there,
/// two alike that harmonics do not decide.
base::Answer<RunningSpeed> running_speed(std::span<const Peak> peaks, const Machine& machine, double line_hz);

/// A fundamental whose multiples stand in the spectrum, found without knowing the speed.
struct SpeedCandidate {
  base::Estimate fundamental;  ///< Hz
  int count = 0;               ///< of its multiples that were found
};

/// The same where the machine's speed is not declared: the candidate that the lines support best, refined as above.
/// Where `possible_speeds` knows a range, the search above goes first, and candidates within the range count only if it
/// refuses. A candidate counts by the share of its first six multiples that stand in the lines, times the share of the
/// power they hold, and half where its fundamental itself is not there: so its halves and thirds, which hold the same
/// lines, lose. On a line supply of known frequency those within the slip range of 2, 4, ... 12 poles go first while
/// the best of them has half the support of the best of all. Refused (`speed-unknown`): no candidate with two
/// multiples, or two that are supported alike (within 20 %).
base::Answer<RunningSpeed> running_speed(std::span<const Peak> peaks, const Machine& machine, double line_hz,
                                         std::span<const SpeedCandidate> candidates);

/// The strongest line alone in `possible_speeds` of a declared speed; two within 6 dB are refused. For one channel.
base::Answer<base::Estimate> running_speed(std::span<const Peak> peaks, const Machine& machine);

}  // namespace stillmass::machine
