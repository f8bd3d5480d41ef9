#pragma once

#include <cstdint>
#include <span>
#include <vector>

namespace stillmass::recording {

/// One sample that stands far off its neighbours.
struct Spike {
  std::int64_t frame = 0;
  double distance = 0.0;  ///< from the middle of its neighbours
};

/// The largest spikes, as many as are kept; of equal ones the earlier.
struct SpikeList {
  static constexpr std::size_t kept = 64;
  std::vector<Spike> largest;  ///< in the order of size

  void add(const Spike& spike);
  void append(const SpikeList& later);
};

/// Samples in the window of a spike: it stands in the middle, or at the end of the signal at that end.
inline constexpr std::size_t spike_window = 7;

/// Looks at every window of `samples` that starts before `windows`. at_begin, at_end: the signal begins with the first,
/// ends with the last of the samples.
void find_spikes(std::span<const double> samples, std::size_t windows, std::int64_t first_frame, bool at_begin,
                 bool at_end, SpikeList& spikes);

}  // namespace stillmass::recording
