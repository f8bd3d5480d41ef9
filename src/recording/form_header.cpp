#include "recording/form_header.hpp"

#include <algorithm>
#include <string>

namespace stillmass::recording {
namespace {

constexpr int max_chunks = 10000;  // a walk over noise ends
constexpr std::uint64_t never_filled_in = 0xFFFFFFFF;

// A big-endian number; 0 beyond the end of the file.
std::uint64_t number(const InputFile& file, std::int64_t at, std::size_t bytes) {
  std::uint64_t value = 0;
  const std::string raw = file.read_at(at, bytes);
  for (const char c : raw) value = (value << 8) | static_cast<unsigned char>(c);
  return raw.size() == bytes ? value : 0;
}

}  // namespace

std::optional<std::int64_t> promised_form_frames(const InputFile& file) {
  const std::string head = file.read_at(0, 12);
  if (!head.starts_with("FORM") || (!head.ends_with("AIFF") && !head.ends_with("AIFC"))) return {};
  std::uint64_t stated = 0;
  std::uint64_t frame_bytes = 0;
  std::uint64_t sound_bytes = 0;
  std::int64_t at = 12;
  for (int chunk = 0; chunk < max_chunks && at + 8 <= file.size(); ++chunk) {
    const std::string name = file.read_at(at, 4);
    const std::uint64_t size = number(file, at + 4, 4);
    if (name == "COMM") {
      stated = number(file, at + 10, 4);
      frame_bytes = number(file, at + 8, 2) * ((number(file, at + 14, 2) + 7) / 8);
    }
    constexpr std::uint64_t offset_and_block = 8;
    if (name == "SSND" && size > offset_and_block && size != never_filled_in) sound_bytes = size - offset_and_block;
    at += 8 + static_cast<std::int64_t>(size + (size & 1));
  }
  std::optional<std::int64_t> promised;
  if (stated != 0 && stated != never_filled_in) promised = static_cast<std::int64_t>(stated);
  if (sound_bytes != 0 && frame_bytes != 0) {
    const auto by_size = static_cast<std::int64_t>(sound_bytes / frame_bytes);
    promised = std::min(promised.value_or(by_size), by_size);
  }
  return promised;
}

}  // namespace stillmass::recording
