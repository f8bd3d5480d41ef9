#pragma once

#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/modal/hits.hpp"
#include "stillmass/recording/reader.hpp"

#include "modal/trigger.hpp"

namespace stillmass::modal {

/// A blow as it is looked at: the hit, and where its parts lie in frames of the recording.
struct Blow {
  Hit hit;
  std::int64_t contact_end = 0;
  std::int64_t window_end = 0;     ///< of the force window, before it falls
  std::int64_t available_end = 0;  ///< the next blow, or the end of the segment
  bool next_is_blow = false;

  void refuse(HitVerdict verdict, std::string reason);
};

/// Frames over which the force window falls, and the least it stays open after contact.
inline constexpr std::int64_t window_margin = 16;

/// Frames before contact that belong to a block.
std::int64_t frames_before(double rate_hz);

/// Measures the pulse that begins at a trigger: beginning, peak, contact; refuses a bounce and clipping.
Blow measure_pulse(recording::Reader& reader, std::size_t channel, const Levels& levels, std::int64_t trigger);
/// The same for a rise of a response.
Blow measure_rise(recording::Reader& reader, std::size_t channel, const Levels& levels, std::int64_t trigger);

/// Refuses blows whose responses are clipped within a second.
void refuse_overloads(recording::Reader& reader, std::span<const std::size_t> responses, std::vector<Blow>& blows);
/// Refuses blows far weaker than the others.
void refuse_weak(std::vector<Blow>& blows);
/// Refuses blows with too little time after them, and gives the length in frames (from contact) that all the others
/// have; 0 where none is left. `decayed` tells how many frames the response of a blow takes to die away.
std::int64_t common_length(std::vector<Blow>& blows, double rate_hz, double max_s, std::int64_t decayed);

}  // namespace stillmass::modal
