#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/recording/recording.hpp"

#include "recording/moments.hpp"

namespace stillmass::recording {

/// The mean of a signal in columns of half a second or longer, at most 240 of them: how the level that the signal swings
/// about moves over the recording.
class SlowMean {
 public:
  SlowMean(FrameRange range, double rate_hz);

  void take(std::span<const double> samples, std::int64_t first_frame);
  void merge(const SlowMean& later);

  struct Shift {
    enum class Kind { settles, drifts, jumps };
    Kind kind = Kind::drifts;
    double amount = 0.0;  ///< from begin to end of it, SI
    FrameRange frames;    ///< while it moves
  };
  /// Nothing where the mean stays, and for recordings of less than eight columns.
  std::optional<Shift> shift() const;

 private:
  struct Column {
    FrameRange frames;
    Moments moments;
  };
  std::vector<Column> usable() const;

  FrameRange range_;
  std::int64_t columns_;
  std::vector<Moments> held_;
};

}  // namespace stillmass::recording
