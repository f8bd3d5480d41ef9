#pragma once

#include <complex>
#include <cstddef>
#include <cstdint>
#include <memory>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/recording/chunk.hpp"
#include "stillmass/recording/recording.hpp"

namespace stillmass::spectral {

/// How a band is brought down to 0 Hz: mixed with exp(-2 pi i centre t), low-passed, every `factor`-th sample kept.
struct BaseBand {
  double rate_hz = 0.0;    ///< of the recording
  double centre_hz = 0.0;  ///< what becomes 0 Hz
  std::size_t factor = 1;
  std::vector<double> even;      ///< taps times cos(2 pi centre k / rate), k = 0 ... half length
  std::vector<double> odd;       ///< taps times sin of it
  std::int64_t half_length = 0;  ///< of the filter, frames

  double low_rate_hz() const { return rate_hz / static_cast<double>(factor); }
  /// Complex samples of a stretch of that many frames, whole filters only.
  std::int64_t samples_in(std::int64_t frames) const;
};

/// Gain 1 within 1e-5 up to `half_width_hz` on both sides of the centre; what folds into that band is 100 dB down. The
/// rate kept is 2 half widths and `transition_hz` or more; no filter where that leaves nothing out.
BaseBand base_band(double rate_hz, double centre_hz, double half_width_hz, double transition_hz);

/// The transition that costs no more than 1 % of a stretch at each of its ends, and no less than half the band: wide
/// transitions make short filters.
double transition_for(double band_hz, double stretch_s);

/// Complex samples one behind the other; a sample is NaN where a recorded sample under its filter is invalid.
struct LowRateRun {
  std::size_t segment = 0;
  std::int64_t first = 0;  ///< number of the first sample in its segment's part of the range
  std::vector<std::vector<std::complex<double>>> channels;
};

/// Turns chunks into complex samples, whatever the chunks. Sample n of a segment's part [begin, end) of the range
/// stands at frame begin + half_length + n factor; it belongs to the partial that owns the first frame under its
/// filter, so a partial must look 2 half_length frames ahead.
class LowRateStream {
 public:
  LowRateStream(std::shared_ptr<const BaseBand> band, const recording::Recording& recording,
                recording::FrameRange range, std::vector<std::size_t> channels);
  LowRateStream(const LowRateStream& whole, recording::FrameRange owned);

  void take(const recording::Chunk& chunk);
  std::int64_t lookahead() const { return 2 * band_->half_length; }
  const BaseBand& band() const { return *band_; }
  recording::FrameRange part(std::size_t segment) const { return (*parts_)[segment]; }
  const std::vector<std::size_t>& channels() const { return channels_; }
  /// What was made of the chunks, in order.
  std::vector<LowRateRun> runs;

 private:
  void begin_segment(std::size_t segment, recording::FrameRange part);
  void hold(const recording::Chunk& chunk, recording::FrameRange part);
  void produce(recording::FrameRange part);
  bool is_good(std::size_t c, std::int64_t first) const;

  std::shared_ptr<const BaseBand> band_;
  std::shared_ptr<const std::vector<recording::FrameRange>> parts_;  ///< one a segment
  std::vector<std::size_t> channels_;
  recording::FrameRange owned_;
  std::size_t segment_ = static_cast<std::size_t>(-1);
  std::int64_t next_ = 0;        ///< number of the sample that comes next
  std::int64_t held_first_ = 0;  ///< frame of held_[c][0]
  std::vector<std::vector<double>> held_;
  std::vector<std::vector<recording::FrameRange>> bad_;
};

}  // namespace stillmass::spectral
