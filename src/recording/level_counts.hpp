#pragma once

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>
#include <optional>
#include <span>

#include "stillmass/recording/recording.hpp"

namespace stillmass::recording {

/// How often a signal stands at each level: a histogram over +-2^n about zero, 2^n being the least that holds every
/// sample, so that histograms of parts, merged, are to the bit those of the whole. The edges of flat tops are counted a
/// second time with their frames.
class LevelCounts {
 public:
  explicit LevelCounts(double zero) : zero_(zero) {}

  /// Samples, none of them further from zero than `reach`.
  void take(std::span<const double> samples, double reach);
  /// One of them again, where it stands at the edge of a flat top (`is_edge`).
  void take_edge(double sample, std::int64_t frame);
  void merge(const LevelCounts& later);

  /// A cluster of samples at the top (sign +1) or the bottom (-1) of the range, with hardly any next to it. A rounded
  /// top, of whatever signal, holds as many samples in its highest part as in the next three parts of that height
  /// together (a parabola), which is what this is told from. step: least step of the samples.
  struct FlatTop {
    double level = 0.0;  ///< of its outer edge
    std::int64_t samples = 0;
    FrameRange frames;  ///< from the first edge to the last
  };
  std::optional<FlatTop> flat_top(int sign, double step) const;

  /// Two levels with hardly anything between, as a tacho's pulses have.
  bool has_two_levels() const;

 private:
  static constexpr int side = 1024;  // bins on each side of zero
  static constexpr int bins = 2 * side;
  static constexpr int empty_exponent = -1100;

  struct Edges {
    std::int64_t count = 0;
    std::int64_t first = 0;
    std::int64_t last = 0;
    void add(const Edges& more);
  };
  struct Span {
    int lowest = 0;
    int highest = -1;  // below `lowest`: nothing was counted
  };

  int bin_of(double sample) const;
  double bin_width() const;
  void widen(int exponent);
  Span occupied() const;
  std::int64_t sum(int from, int to) const;  // bins [from, to)

  double zero_;
  int exponent_ = empty_exponent;
  std::array<std::int64_t, bins> counts_{};
  std::array<Edges, bins> edges_{};
};

/// Whether the signal jumps in the first or the last of these three steps and rests in the two others: the edge of a
/// flat top, noise on it or not. The steps of a rounded top (a parabola) differ by a factor of three at most.
inline bool is_edge(double a, double b, double c, double d) {
  constexpr double jump = 8.0;
  const double in = std::abs(b - a);
  const double middle = std::abs(c - b);
  const double out = std::abs(d - c);
  return in > jump * std::max(middle, out) || out > jump * std::max(in, middle);
}

}  // namespace stillmass::recording
