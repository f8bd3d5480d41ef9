#pragma once

#include <array>
#include <cstdint>
#include <optional>
#include <span>

#include "stillmass/recording/recording.hpp"

namespace stillmass::recording {

/// How often a signal stands at each level: a histogram over +-2^n about zero, 2^n being the least that holds every
/// sample, so that histograms of parts, merged, are to the bit those of the whole. Samples that stand still are counted
/// a second time with their frames: a flat top is made of them even where noise lies on it.
class LevelCounts {
 public:
  explicit LevelCounts(double zero) : zero_(zero) {}

  /// Samples, none of them further from zero than `reach`.
  void take(std::span<const double> samples, double reach);
  /// One of them again, where it stands still (`stands_still`).
  void take_still(double sample, std::int64_t frame);
  void merge(const LevelCounts& later);

  /// A cluster of samples at the top (sign +1) or the bottom (-1) of the range, with hardly any next to it. A rounded
  /// top, of whatever signal, holds as many samples in its highest part as in the next three parts of that height
  /// together (a parabola), which is what this is told from. step: least step of the samples.
  struct FlatTop {
    double level = 0.0;  ///< of its outer edge
    std::int64_t samples = 0;
    FrameRange frames;  ///< from the first to the last that stands still
  };
  std::optional<FlatTop> flat_top(int sign, double step) const;

  /// Two levels with hardly anything between, as a tacho's pulses have.
  bool has_two_levels() const;

 private:
  static constexpr int side = 1024;  // bins on each side of zero
  static constexpr int bins = 2 * side;
  static constexpr int empty_exponent = -1100;

  struct Still {
    std::int64_t count = 0;
    std::int64_t first = 0;
    std::int64_t last = 0;
  };

  int bin_of(double sample) const;
  double bin_width() const;
  void widen(int exponent);
  std::int64_t sum(int from, int to) const;  // bins [from, to)

  double zero_;
  int exponent_ = empty_exponent;
  std::array<std::int64_t, bins> counts_{};
  std::array<Still, bins> still_{};
};

/// Whether a sample stands still: it moves by less than 1/128 of its distance from zero to its neighbour.
inline bool stands_still(double before, double sample, double zero) {
  const double least = (sample < zero ? zero - sample : sample - zero) / 128.0;
  return (sample < before ? before - sample : sample - before) <= least;
}

}  // namespace stillmass::recording
