#include "spectral/band_filter.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

namespace {

/// Rises from 0 to 1 about 0 over the width of a flank.
double raised_cosine(double from_edge, double flank) {
  const double x = std::clamp(from_edge / flank, -0.5, 0.5);
  return 0.5 * (1.0 + std::sin(std::numbers::pi * x));
}

}  // namespace

BandFilter::BandFilter(std::size_t frames, double rate_hz, base::Interval band_hz, double flank_hz,
                       double least_rate_hz)
    : frames_(frames) {
  const double line = rate_hz / static_cast<double>(frames);
  const double lowest = std::max(band_hz.lo - 0.5 * flank_hz, line);
  const double highest = std::min(band_hz.hi + 0.5 * flank_hz, 0.5 * rate_hz - line);
  first_ = static_cast<std::size_t>(std::ceil(lowest / line));
  samples_ = 1;
  if (!(highest >= lowest)) return;
  const auto last = static_cast<std::size_t>(std::floor(highest / line));
  for (std::size_t k = first_; k <= last; ++k) {
    const double f = static_cast<double>(k) * line;
    gains_.push_back(raised_cosine(f - band_hz.lo, flank_hz) * raised_cosine(band_hz.hi - f, flank_hz));
  }
  samples_ = fast_length_at_least(std::max(gains_.size(), static_cast<std::size_t>(std::ceil(least_rate_hz / line))));
}

void BandFilter::squared_envelope(std::span<const std::complex<double>> lines, ComplexFft& fft,
                                  std::span<double> squared) const {
  // The forward transform of the conjugate is the conjugate of the backward one; the shift of the band down to 0 Hz
  // turns the phase only.
  const auto values = fft.values();
  const double scale = 2.0 / static_cast<double>(frames_);
  for (std::size_t j = 0; j < gains_.size(); ++j) values[j] = scale * gains_[j] * std::conj(lines[first_ + j]);
  std::fill(values.begin() + static_cast<std::ptrdiff_t>(gains_.size()), values.end(), std::complex<double>{});
  fft.run();
  for (std::size_t i = 0; i < squared.size(); ++i) {
    squared[i] = values[i].real() * values[i].real() + values[i].imag() * values[i].imag();
  }
}

}  // namespace stillmass::spectral
