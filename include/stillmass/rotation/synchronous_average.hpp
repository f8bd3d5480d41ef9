#pragma once

#include <complex>
#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/speed_curve.hpp"
#include "stillmass/rotation/tacho.hpp"

namespace stillmass::rotation {

struct SynchronousOptions {
  std::vector<std::size_t> channels;  ///< positions in `Recording::channels`; empty: all vibration channels
  std::size_t turns_per_block = 1;    ///< N >= 1: lines at multiples of 1/N of the speed (a slower shaft, a belt)
  double highest_order = 20.0;        ///< of the lines, 1 to 100; the waveform is free of aliases up to there
};

/// One line of the order spectrum of an averaged waveform.
struct SynchronousLine {
  double order = 0.0;
  std::complex<double>
      value;  ///< r.m.s. amplitude with phase, SI, as OrderTrack has it: x = sqrt 2 Re(value e^{+i 2 pi order n})
  base::Estimate amplitude_rms;  ///< SI; u from the scatter between blocks, along the line's own phase; dof blocks - 1
  double phase_lag_deg = 0.0;  ///< from the tacho's edge to the next positive peak, 0 <= lag < 360 degrees of the order
  double phase_u_deg = 180.0;  ///< from the scatter across it; 180 where the line is not above its scatter
};

/// The coherent average of one channel over K blocks of whole turns: what repeats with the shaft stays, everything else
/// falls, noise as 1/sqrt K, a steady tone of another frequency as 1/K (by how far it is from all lines).
struct SynchronousAverage {
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  std::size_t turns_per_block = 1;
  std::size_t samples_per_turn = 64;
  std::size_t blocks = 0;         ///< K, of valid samples throughout; 0: nothing else is given
  std::vector<double> waveform;   ///< mean at each angle, SI; sample i at i / samples_per_turn turns after the edge
  std::vector<double> deviation;  ///< standard deviation of the blocks at each angle, SI
  std::vector<SynchronousLine> lines;    ///< orders 1/N, 2/N, ... up to the highest; the mean (order 0) left out
  double mean = 0.0;                     ///< SI
  double mean_square = 0.0;              ///< of the resampled channel about the mean, SI squared
  double synchronous_mean_square = 0.0;  ///< of the waveform about its mean, the noise left in it (variance / K) taken
                                         ///< off; not below 0
  std::optional<double> synchronous_share;  ///< of the mean square, 0 to 1; absent where nothing varies
  std::optional<double> speed_hz;           ///< mean speed over the blocks

  /// Standard error of the mean at angle i: deviation / sqrt K.
  double standard_error(std::size_t i) const;
};

/// Averages over blocks of `turns_per_block` turns, one behind the other, each beginning at a whole multiple of that
/// number of turns from the first pulse (so fractional orders keep their phase). Lines whose frequency passes 0.4 of
/// the rate at the highest speed are left out. Streams; memory does not grow with the number of turns. 1 and N threads
/// give the same bits. Refused (`too-few-turns`): fewer than 4 blocks. Throws `Error` (usage) for options out of range.
base::Answer<std::vector<SynchronousAverage>> synchronous_averages(const recording::Reader& reader,
                                                                   recording::FrameRange range, const SpeedCurve& curve,
                                                                   const SynchronousOptions& options,
                                                                   const base::Context& context);

struct SynchronousSettings {
  std::optional<base::Interval> time_s;      ///< part of the recording; absent: all of it
  std::optional<std::size_t> tacho_channel;  ///< absent: the first channel with role tacho
  TachoOptions tacho;                        ///< its `channel` is not used
  SynchronousOptions average;
};

struct Synchronous {
  Pulses pulses;
  SpeedCurve speed;
  std::vector<SynchronousAverage> channels;
  std::vector<base::Finding> findings;  ///< of the pulses; a gap that halved the recording
};

/// Everything from one recording with a tacho. Where a gap parts it, the longest part without one is used. Refused:
/// `no-tacho`, `no-pulses`, `too-few-turns`.
base::Answer<Synchronous> synchronous_average(const recording::Reader& reader, const SynchronousSettings& settings,
                                              const base::Context& context);

}  // namespace stillmass::rotation
