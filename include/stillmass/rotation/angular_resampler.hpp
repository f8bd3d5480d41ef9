#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <vector>

#include "stillmass/numeric/interpolate.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/speed_curve.hpp"

namespace stillmass::rotation {

struct AngularOptions {
  std::size_t samples_per_turn = 64;
  std::vector<std::size_t> channels;  ///< positions in `Recording::channels`
};

/// Angular samples [begin, end); sample i stands at i / samples_per_turn turns from the first pulse.
struct AngularRange {
  std::int64_t begin = 0;
  std::int64_t end = 0;
  std::int64_t size() const { return end > begin ? end - begin : 0; }
};

/// Consecutive samples at equal angles, planar, in the order of AngularOptions::channels.
struct AngularBlock {
  std::int64_t first = 0;
  std::vector<std::vector<double>> channels;
  std::vector<std::vector<AngularRange>> invalid;  ///< per channel: what rests on samples that were not valid

  /// True where channel c (position in `channels`) may be used over the whole range.
  bool is_valid(std::size_t c, AngularRange range) const;
};

/// Samples at equal angles, free of aliases: the recording is halved in rate as often as the speed allows, then read
/// through a Kaiser-windowed sinc whose cut-off follows the local speed. Orders up to 0.4 samples_per_turn (and
/// frequencies up to 0.4 rate) are flat within 1e-4; what lies above 0.6 samples_per_turn is below -95 dB.
class AngularResampler {
 public:
  /// `range` lies within one segment; `curve` must outlive the resampler. Throws `Error` (usage) for fewer than
  /// 4 samples a turn or a channel that is not there.
  AngularResampler(const recording::Reader& reader, recording::FrameRange range, const SpeedCurve& curve,
                   AngularOptions options);

  /// The samples between the first and the last pulse that see no end of the range. May be empty.
  AngularRange available() const { return available_; }
  /// Those samples; must be available. Reads the frames they need as a stream and holds the halved ones.
  AngularBlock samples(AngularRange wanted);
  /// Another one with a handle of its own, for another thread.
  AngularResampler second() const;

 private:
  AngularResampler(const AngularResampler& other, std::unique_ptr<recording::Reader> reader);
  struct Plan;
  Plan plan(AngularRange wanted) const;
  double turn_at(std::int64_t sample) const;
  double time_at(std::int64_t sample) const;
  double angular_rate(std::int64_t sample) const;
  double reach_s(std::int64_t sample) const;

  std::unique_ptr<recording::Reader> reader_;
  recording::FrameRange range_;
  const SpeedCurve* curve_;
  AngularOptions options_;
  std::shared_ptr<const numeric::KaiserSinc> kernel_;
  AngularRange available_;
};

}  // namespace stillmass::rotation
