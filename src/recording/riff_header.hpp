#pragma once

#include <cstdint>
#include <optional>

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// How samples lie in the data chunk of a RIFF, RF64, BW64 (ITU-R BS.2088) or W64 file.
struct RiffHeader {
  bool big_endian = false;  ///< RIFX
  int format_tag = 0;       ///< 1 integer, 3 float; the one inside an extensible header
  int channels = 0;
  std::int64_t rate_hz = 0;
  int bits = 0;                                ///< of one sample
  int frame_bytes = 0;                         ///< where the header contradicts itself, as channels and bits have it
  std::int64_t data_offset = 0;                ///< in the file
  std::optional<std::int64_t> declared_bytes;  ///< nothing: the header was never completed (0 or all bits set)
  std::int64_t real_bytes = 0;                 ///< samples that are really there, whole frames

  /// Bytes of one stored sample.
  int sample_bytes() const { return channels > 0 ? frame_bytes / channels : 0; }
  std::int64_t frames() const { return frame_bytes > 0 ? real_bytes / frame_bytes : 0; }
  /// Nothing where the header does not say.
  std::optional<std::int64_t> declared_frames() const;
};

/// Walks the chunks of the file up to the samples; nothing for a file of another kind, or one without a format or data
/// chunk. Where a 32-bit size has wrapped around (a RIFF of more than 4 GiB), the real size stands for the declared
/// one.
std::optional<RiffHeader> read_riff_header(const InputFile& file);

}  // namespace stillmass::recording
