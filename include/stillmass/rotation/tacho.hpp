#pragma once

#include <cstddef>
#include <optional>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/recording/reader.hpp"

namespace stillmass::rotation {

enum class Edge { rising, falling };
std::string_view name(Edge edge);

struct TachoOptions {
  std::size_t channel = 0;  ///< position in `Recording::channels`, from 0
  int pulses_per_turn = 1;  ///< >= 1
  Edge edge = Edge::rising;
  std::optional<double> threshold;   ///< SI unit of the channel; absent: the middle of the pulses
  std::optional<double> hysteresis;  ///< full width, same unit; absent: 0.3 of the pulses' height
};

/// The pulses of a tacho, each with the angle at which it must have come: a missing pulse is a step of two in the
/// angle, never an invented time.
struct Pulses {
  std::vector<double> time_s;  ///< from the start of the recording, ascending
  std::vector<double> turns;   ///< turns since the first pulse; multiples of 1 / pulses_per_turn
  int pulses_per_turn = 1;
  Edge edge = Edge::rising;
  double threshold = 0.0;
  double hysteresis = 0.0;
  /// Standard uncertainty of one pulse's time, s: from the scatter of the pulses about a smooth motion (robust third
  /// difference over whole turns), which includes torsional jitter; absent with fewer than 8 turns.
  std::optional<double> time_u;
  std::size_t missing = 0;
  std::size_t extra = 0;
  std::vector<base::Finding> findings;  ///< missing_pulses, extra_pulses
};

/// Pulses of the tacho channel in the frames of `range` (one segment). An edge counts once the signal has passed the
/// whole hysteresis band around the threshold; its time is the crossing of the threshold, by a straight line between
/// two samples (an edge steeper than one sample is known to half a sample: u = 0.29 / rate). Refused (`no-pulses`) with
/// fewer than 4 pulses. Streams; memory grows with the turns only.
base::Answer<Pulses> find_pulses(const recording::Reader& reader, recording::FrameRange range,
                                 const TachoOptions& options, const base::Context& context);

/// The same from raw crossing times: tells true pulses from doubled and missing ones by the intervals around each
/// (median of 5), and numbers the turns. Intervals may change by up to 30 % from pulse to pulse; the turns before that
/// holds (a start from rest), and those at the end after which it no longer does (coming to rest), are left out.
base::Answer<Pulses> repaired_pulses(const std::vector<double>& crossings_s, int pulses_per_turn);

}  // namespace stillmass::rotation
