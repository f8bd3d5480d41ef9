#pragma once

#include <complex>
#include <cstddef>
#include <memory>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/recording/pass.hpp"
#include "stillmass/recording/recording.hpp"

#include "spectral/base_band.hpp"

namespace stillmass::spectral {

/// Keeps the longest stretch of one channel's complex samples that has neither a gap nor an invalid sample, as many of
/// them as `most_samples` at most.
class CloseStretch final : public recording::Consumer {
 public:
  static constexpr std::size_t most_samples = 4096;

  CloseStretch(const recording::Recording& recording, recording::FrameRange range, std::size_t channel,
               base::Interval band_hz);

  std::int64_t lookahead() const override { return stream_.lookahead(); }
  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void take(const recording::Chunk& chunk) override { stream_.take(chunk); }
  void merge(recording::Consumer& next) override;

  const BaseBand& band() const { return stream_.band(); }
  /// After the pass.
  const std::vector<std::complex<double>>& samples() const { return best_.samples; }
  /// By how many turns a tone's phase at that place among the samples (a whole number or not) is behind the phase of
  /// the recorded cosine at that instant.
  double turns_at(double place) const;
  /// The frame of the recording at that place among the samples.
  double frame_at(double place) const;

 private:
  struct Stretch {
    std::int64_t begin = 0;  ///< frame at which the segment's part begins
    std::int64_t first = 0;  ///< number of its first sample in the segment's part
    std::vector<std::complex<double>> samples;
  };
  CloseStretch(const CloseStretch& whole, recording::FrameRange owned) : stream_(whole.stream_, owned) {}
  void end_stretch();

  LowRateStream stream_;
  std::size_t segment_ = static_cast<std::size_t>(-1);
  Stretch now_;
  Stretch best_;
};

}  // namespace stillmass::spectral
