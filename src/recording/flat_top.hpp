#pragma once

#include <cstdint>
#include <limits>
#include <span>

namespace stillmass::recording {

/// The greatest value of a stream of samples (of the mirrored stream: the least) and the longest run of samples in a
/// row at it. Streams that follow each other can be joined.
struct FlatTop {
  double value = -std::numeric_limits<double>::infinity();
  std::int64_t longest = 0;
  std::int64_t head = 0;   ///< samples at it that the stream begins with
  std::int64_t tail = 0;   ///< and ends with
  std::int64_t count = 0;  ///< samples of the stream

  /// Consecutive samples, not empty, times `sign`; `greatest`: the greatest of these.
  static FlatTop of(std::span<const double> samples, double sign, double greatest);
  /// `adjacent`: nothing lies between the two streams.
  void append(const FlatTop& later, bool adjacent);
};

}  // namespace stillmass::recording
