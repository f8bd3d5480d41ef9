#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/recording/channel.hpp"
#include "stillmass/spectral/averages.hpp"
#include "stillmass/spectral/deflection.hpp"

namespace stillmass::spectral {

/// Sums of products of the lines of pairs of channels, over lines and blocks. Index [i * channels + j].
struct PairSums {
  std::vector<std::complex<double>> cross;  ///< of conj(X_i) X_j, for i < j
  std::vector<double> power;                ///< of |X_i|^2 in blocks where i and j are valid

  void start(std::size_t channels);
  /// The products of a block at one line; values and validity of each channel.
  void add(std::span<const std::complex<double>> values, std::span<const char> valid);
  void merge(const PairSums& next);
};

/// The lines about one frequency: `count` under the peak, and the noise on each side of it.
struct PeakLines {
  double asked_hz = 0.0;
  std::size_t first = 0;
  std::size_t count = 0;
  std::size_t below_first = 0, below_count = 0;
  std::size_t above_first = 0, above_count = 0;
};

/// Lines for a frequency that stays within `wander` (relative) of itself; the spectrum has `lines` of them. Throws
/// `Error` (usage): so low that the window mixes the peak with what leaks from 0 Hz, or not below rate/2.
PeakLines peak_lines(double frequency_hz, double line_hz, std::size_t lines, Window window, double wander);

struct PeakSums {
  PairSums peak, below, above;
  std::vector<double> line_power;  ///< [channel * (count + 2) + line], from one line before the peak's to one behind
};

/// All that a shape is computed from.
struct PeakData {
  const PeakLines& lines;
  const PeakSums& sums;
  std::span<const std::size_t> counts;           ///< blocks in which i and j are valid, [i * channels + j]
  std::span<const recording::Channel> channels;  ///< of motion
  std::span<const Averages> averages;            ///< of each channel
  double line_hz = 0.0;
  double least_coherence = 0.5;
  Window window = Window::hann;
  std::optional<std::size_t> reference;  ///< among `channels`
};

base::Answer<DeflectionShape> deflection_shape(const PeakData& data);

}  // namespace stillmass::spectral
