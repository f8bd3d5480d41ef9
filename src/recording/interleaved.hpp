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
  /// What a channel's samples (full scale 1.0) become, and where they go: out[i] = factor * sample + offset.
  struct Target {
    double factor = 1.0;
    double offset = 0.0;
    double* out = nullptr;
  };
  /// Hands the first `frames` of the frames read to the targets, one a channel. False where one of these samples is
  /// infinite or not a number.
  bool to(std::span<const Target> targets, std::size_t frames) const;

  static constexpr std::size_t most_frames = 512;  ///< they stay in the processor's nearest cache

 private:
  std::size_t channels_;
  std::variant<std::vector<std::int32_t>, std::vector<float>, std::vector<double>> samples_;
};

}  // namespace stillmass::recording
