#pragma once

#include <cstdint>
#include <memory>
#include <span>

#include "stillmass/base/context.hpp"
#include "stillmass/recording/reader.hpp"

namespace stillmass::recording {

/// An analysis fed from a stream. Several share one pass over a recording. The pass is cut into fixed ranges of frames;
/// each range is given to a fresh partial, and partials are merged in order, so 1 and N threads give the same bits.
class Consumer {
 public:
  virtual ~Consumer() = default;
  /// How many frames past its own range a partial wants to see (a block belongs to the range in which it starts).
  virtual std::int64_t lookahead() const { return 0; }
  /// An empty partial that owns the frames of `owned`. It is given chunks from owned.begin to owned.end + lookahead
  /// (cut at the end of the pass), in order.
  virtual std::unique_ptr<Consumer> fresh(FrameRange owned) const = 0;
  virtual void take(const Chunk& chunk) = 0;
  /// Adds the partial of the next range; it is of the same dynamic type.
  virtual void merge(Consumer& next) = 0;
};

/// Frames of one range of a pass, fixed so that the cut never depends on the number of threads; a multiple of it, at
/// least twice the lookahead, where a consumer looks far ahead.
inline constexpr std::int64_t pass_range_frames = std::int64_t{1} << 18;

/// Runs all consumers over the frames of `range` in one pass, on context.threads threads, each with its own handle.
/// `what` names the work for the progress display. Throws what the reader throws, and `Stopped`.
void run_pass(const Reader& reader, FrameRange range, std::span<Consumer* const> consumers,
              const base::Context& context, std::string_view what);

}  // namespace stillmass::recording
