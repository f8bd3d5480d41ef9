#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/base/interval.hpp"

#include "spectral/fft.hpp"

namespace stillmass::spectral {

/// A band-pass on the lines of a block's transform, whose output is the complex envelope at a rate of its own. Gain 1
/// in the band with raised-cosine flanks about its edges, `flank_hz` wide, half the amplitude on the edge; neighbours
/// with equal flanks add up to 1. The filter is circular: what lies within about 2 / flank_hz of the ends of a block
/// holds something of the other end.
class BandFilter {
 public:
  /// For blocks of `frames` real samples. The envelope has at least `least_rate_hz` samples a second, and at least as
  /// many as the lines of the band.
  BandFilter(std::size_t frames, double rate_hz, base::Interval band_hz, double flank_hz, double least_rate_hz);

  /// Samples of the complex envelope a block.
  std::size_t samples() const { return samples_; }
  std::size_t first_line() const { return first_; }
  std::span<const double> gains() const { return gains_; }

  /// Puts the squared magnitude of the complex envelope, x + i Hilbert(x), into `squared` (as long as `samples`).
  /// `lines`: the one-sided transform of the block; `fft`: of `samples` values.
  void squared_envelope(std::span<const std::complex<double>> lines, ComplexFft& fft, std::span<double> squared) const;

 private:
  std::size_t frames_;
  std::size_t samples_ = 0;
  std::size_t first_ = 0;
  std::vector<double> gains_;
};

}  // namespace stillmass::spectral
