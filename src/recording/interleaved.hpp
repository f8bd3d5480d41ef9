#pragma once

#include <cstdint>
#include <span>
#include <variant>
#include <vector>

#include "recording/sound_reader.hpp"

namespace stillmass::recording {

/// A few frames of a sound file as it holds them: one sample of each channel after the other, in the type that needs no
/// rounding and the least room.
class Interleaved {
 public:
  explicit Interleaved(const SoundReader& sound);

  /// Reads frames, at most `most_frames` of them. Returns how many there were.
  std::int64_t read(SoundReader& sound, std::int64_t frames);
  /// out[i] = factor * sample + offset, of channel c of the frames read (full scale 1.0).
  void channel(std::size_t c, double factor, double offset, std::span<double> out) const;
  /// True where no sample read is infinite or not a number.
  bool all_finite() const { return all_finite_; }

  static constexpr std::size_t most_frames = 512;  ///< they stay in the processor's nearest cache

 private:
  std::size_t channels_;
  bool all_finite_ = true;
  std::variant<std::vector<std::int32_t>, std::vector<float>, std::vector<double>> samples_;
};

}  // namespace stillmass::recording
