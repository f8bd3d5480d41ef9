#include "oracle/wav_samples.hpp"

#include <bit>
#include <cstddef>
#include <stdexcept>

namespace stillmass::oracle {
namespace {

std::uint32_t little_endian(std::string_view bytes, std::size_t at, std::size_t count) {
  if (at + count > bytes.size()) throw std::runtime_error("WAV file too short");
  std::uint32_t value = 0;
  for (std::size_t i = 0; i < count; ++i) {
    value |= static_cast<std::uint32_t>(static_cast<unsigned char>(bytes[at + i])) << (8 * i);
  }
  return value;
}

std::int64_t signed_counts(std::string_view bytes, std::size_t at, int bits) {
  const std::int64_t value = little_endian(bytes, at, static_cast<std::size_t>(bits / 8));
  const std::int64_t span = std::int64_t{1} << bits;
  return value >= span / 2 ? value - span : value;
}

}  // namespace

WavSamples wav_samples(std::string_view bytes) {
  if (!bytes.starts_with("RIFF") || bytes.substr(8, 4) != "WAVE") throw std::runtime_error("no WAV file");
  WavSamples wav;
  for (std::size_t at = 12; at + 8 <= bytes.size();) {
    const std::string_view name = bytes.substr(at, 4);
    const std::size_t size = little_endian(bytes, at + 4, 4);
    const std::size_t body = at + 8;
    if (name == "fmt ") {
      wav.format = static_cast<int>(little_endian(bytes, body, 2));
      wav.channels = static_cast<int>(little_endian(bytes, body + 2, 2));
      wav.rate_hz = static_cast<int>(little_endian(bytes, body + 4, 4));
      wav.bits = static_cast<int>(little_endian(bytes, body + 14, 2));
      if (wav.format == 0xFFFE) wav.format = static_cast<int>(little_endian(bytes, body + 24, 2));
    } else if (name == "data") {
      const auto width = static_cast<std::size_t>(wav.bits / 8);
      for (std::size_t i = 0; i + width <= size; i += width) {
        if (wav.format == 3) {
          wav.floats.push_back(std::bit_cast<float>(little_endian(bytes, body + i, 4)));
        } else {
          wav.counts.push_back(signed_counts(bytes, body + i, wav.bits));
        }
      }
      return wav;
    }
    at = body + size + size % 2;
  }
  throw std::runtime_error("WAV file without samples");
}

}  // namespace stillmass::oracle
