#pragma once

#include <cmath>
#include <cstdint>
#include <cstring>
#include <string>
#include <vector>

namespace stillmass::tests {

inline std::string little(std::uint64_t value, int bytes) {
  std::string out;
  for (int i = 0; i < bytes; ++i) out.push_back(static_cast<char>((value >> (8 * i)) & 0xFF));
  return out;
}

inline std::string bytes_of(float value) {
  std::uint32_t word = 0;
  std::memcpy(&word, &value, sizeof word);
  return little(word, 4);
}

/// A WAV file byte by byte, independent of any library: interleaved samples are given as they are stored.
struct WavBytes {
  int tag = 1;  ///< 1 integer, 3 float
  int bits = 16;
  int channels = 1;
  int rate_hz = 1000;
  std::string data;

  void add(std::int64_t sample) { data += little(static_cast<std::uint64_t>(sample), bits / 8); }
  void add(float sample) { data += bytes_of(sample); }

  std::string format_chunk() const {
    const int frame = channels * bits / 8;
    return "fmt " + little(16, 4) + little(static_cast<unsigned>(tag), 2) + little(static_cast<unsigned>(channels), 2) +
           little(static_cast<unsigned>(rate_hz), 4) + little(static_cast<unsigned>(rate_hz * frame), 4) +
           little(static_cast<unsigned>(frame), 2) + little(static_cast<unsigned>(bits), 2);
  }
  std::string file() const { return with_size(data.size()); }
  /// The data chunk declares that many bytes, whatever is there.
  std::string with_size(std::uint64_t declared) const {
    const std::string body = "WAVE" + format_chunk() + "data" + little(declared, 4) + data;
    return "RIFF" + little(36 + declared, 4) + body;
  }
  std::string rf64() const {
    const std::string body = "WAVEds64" + little(28, 4) + little(data.size() + 72, 8) + little(data.size(), 8) +
                             little(data.size() / static_cast<std::size_t>(channels * bits / 8), 8) + little(0, 4) +
                             format_chunk() + "data" + little(0xFFFFFFFF, 4) + data;
    return "RF64" + little(0xFFFFFFFF, 4) + body;
  }
};

/// One channel of 16-bit samples.
inline WavBytes wav16(const std::vector<int>& samples, int rate_hz = 1000) {
  WavBytes wav;
  wav.rate_hz = rate_hz;
  for (const int sample : samples) wav.add(std::int64_t{sample});
  return wav;
}

}  // namespace stillmass::tests
