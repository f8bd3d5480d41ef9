#pragma once

#include <cstdint>
#include <string_view>
#include <vector>

namespace stillmass::oracle {

/// What a plain WAV file of integer or float samples says, read byte by byte.
struct WavSamples {
  int format = 0;  ///< 1: integers, 3: floats (also where an extensible header says so)
  int channels = 0;
  int bits = 0;
  int rate_hz = 0;
  std::vector<std::int64_t> counts;  ///< interleaved, of integers
  std::vector<float> floats;         ///< interleaved, of floats
};

/// Throws std::runtime_error for anything else.
WavSamples wav_samples(std::string_view bytes);

}  // namespace stillmass::oracle
