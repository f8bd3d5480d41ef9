#pragma once

#include <optional>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/order_track.hpp"
#include "stillmass/rotation/speed_curve.hpp"
#include "stillmass/rotation/tacho.hpp"
#include "stillmass/rotation/waterfall.hpp"

namespace stillmass::rotation {

struct RunupSettings {
  std::optional<base::Interval> time_s;      ///< part of the recording; absent: all of it
  std::optional<std::size_t> tacho_channel;  ///< absent: the first channel with role tacho
  TachoOptions tacho;                        ///< its `channel` is not used
  OrderOptions orders;
  WaterfallOptions waterfall;
  bool with_waterfall = true;
};

/// A run-up, coast-down or steady run with a tacho.
struct Runup {
  Pulses pulses;
  SpeedCurve speed;
  std::vector<OrderTrack> tracks;
  std::vector<Waterfall> waterfalls;
  std::vector<base::Finding> findings;  ///< of the pulses; a gap that halved the recording
};

/// Everything from one recording. Where a gap parts it, the longest part without one is used. Refused: `no-tacho`,
/// `no-pulses`, `too-few-turns` (fewer than one block of turns).
base::Answer<Runup> runup(const recording::Reader& reader, const RunupSettings& settings, const base::Context& context);

}  // namespace stillmass::rotation
