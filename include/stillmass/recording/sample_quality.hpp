#pragma once

#include <array>
#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/recording/pass.hpp"

namespace stillmass::recording {

/// What the samples of one channel tell without any spectrum. A number that no valid sample supports is absent.
struct ChannelQuality {
  std::string channel;
  std::int64_t samples = 0;            ///< valid ones
  std::int64_t missing = 0;            ///< not valid: cells without a number, NaN
  std::optional<double> mean;          ///< SI
  std::optional<double> rms;           ///< of the signal about its mean, SI
  std::optional<double> peak;          ///< largest absolute value about the mean, SI
  std::optional<double> crest_factor;  ///< peak / rms; absent where rms is 0
  bool looks_like_pulses = false;      ///< two levels with hardly anything between, as a tacho gives
  std::vector<base::Finding> findings;
};

/// Thresholds of the sample-level checks: common practice, no published source.
namespace quality_limit {
inline constexpr std::int64_t clipped_run = 3;      ///< equal samples at the extreme that count as a flat top
inline constexpr double clipped_entry_steps = 4.0;  ///< a flat top is entered or left by more steps than a rounded one
inline constexpr std::int64_t dropout_run = 8;      ///< exact zeros in a row
inline constexpr double dropout_edge = 0.25;        ///< jump into or out of the zeros, of the r.m.s. value about zero
inline constexpr double flat_seconds = 0.25;        ///< equal samples over that time ...
inline constexpr std::int64_t flat_run = 50;        ///< ... and at least so many
inline constexpr double spike_range = 5.0;          ///< distance from six neighbours, in ranges of these neighbours
inline constexpr double spike_rms = 8.0;            ///< and in r.m.s. values of the channel
inline constexpr double few_steps = 32.0;           ///< peak-to-peak value in least steps below which bits are wasted
inline constexpr double dead_steps = 2.0;           ///< peak-to-peak value in stored steps that is no signal at all

// A flat top with noise on it: samples that crowd at an extreme level.
inline constexpr std::array<double, 4> flat_top_heights{0.004, 0.01, 0.02, 0.04};  ///< of the crowd, of half the span
inline constexpr double flat_top_ratio = 4.0;      ///< samples in it over those in the next three heights; a sine: 1
inline constexpr std::int64_t flat_top_edges = 4;  ///< of the crowd: a jump and then rest, or the reverse
inline constexpr int flat_top_span_bins = 24;      ///< finer than that the levels must be told apart

// A signal of two levels: a tacho's pulses.
inline constexpr double pulse_edge = 0.15;    ///< so near to the least or largest value, of the span ...
inline constexpr double pulse_share = 0.9;    ///< ... stand at least so many of the samples ...
inline constexpr double pulse_least = 0.002;  ///< ... and so many at each end

// A loose contact that leaves noise, not zeros.
inline constexpr double quiet_seconds = 0.04;      ///< length of the windows looked at (16 samples at least)
inline constexpr std::int64_t quiet_windows = 25;  ///< fewer than that tell nothing
inline constexpr double quiet_steady = 0.4;  ///< lower quartile of their peak-to-peak values, of the median: steady
inline constexpr double quiet_share = 0.02;  ///< two windows in a row below that share of the median: a dropout

inline constexpr double burst_steady =
    2.0;  ///< 90th percentile of the windows, of their median: steady enough for bursts
inline constexpr double burst_ratio = 2.5;  ///< single windows so far above that percentile: interference, a knock

// Settling and drift of the mean.
inline constexpr double drift_seconds = 0.5;     ///< least length of the columns whose means are compared
inline constexpr std::size_t drift_columns = 8;  ///< fewer than that tell nothing
inline constexpr double drift_share = 0.25;      ///< least shift, of the usual r.m.s. value within a column
inline constexpr double drift_scatter = 8.0;     ///< and of the scatter of the means from column to column
}  // namespace quality_limit

/// The checks as a consumer: `clipped` (flat tops at the end of the range) and `overload` (flat tops below it),
/// `dropout`, `flat_line`, `spikes`, `drift`, `few_bits`, `no_signal`, `not_a_number`. Blows and pulses look like
/// faults of a vibration signal, so of a force only flat tops, few bits and no signal are judged, of a tacho only no
/// signal. However the pass is cut, the findings are the same; the sums agree to rounding.
class SampleQuality : public Consumer {
 public:
  /// range: the frames of the pass; without it all of them.
  explicit SampleQuality(const Recording& recording, std::optional<FrameRange> range = {});
  ~SampleQuality() override;

  std::int64_t lookahead() const override;
  std::unique_ptr<Consumer> fresh(FrameRange owned) const override;
  void take(const Chunk& chunk) override;
  void merge(Consumer& next) override;
  /// One entry a channel, in order. Findings come with times from the start of the recording.
  std::vector<ChannelQuality> result() const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

/// The checks over the frames of `range` in a pass of their own.
std::vector<ChannelQuality> sample_quality(const Reader& reader, FrameRange range, const base::Context& context);

}  // namespace stillmass::recording
