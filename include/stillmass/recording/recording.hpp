#pragma once

#include <cstdint>
#include <filesystem>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/channel.hpp"

namespace stillmass::recording {

/// A run of frames without a gap: frame i of it was taken at start_s + i / rate.
struct Segment {
  std::int64_t first_frame = 0;  ///< counted over the whole recording
  std::int64_t frames = 0;
  double start_s = 0.0;  ///< from the start of the recording
};

/// Frames [begin, end).
struct FrameRange {
  std::int64_t begin = 0;
  std::int64_t end = 0;
  std::int64_t size() const { return end > begin ? end - begin : 0; }
};

/// What was found in a file: everything but the samples.
struct Recording {
  std::filesystem::path file;
  std::string format;  ///< "WAV, 24-bit", "CSV, semicolon, decimal comma, 1 header line"
  double rate_hz = 0.0;
  std::int64_t frames = 0;  ///< of all segments
  std::vector<Channel> channels;
  std::vector<Segment> segments;        ///< in order, at least one
  std::vector<base::Finding> findings;  ///< of the file as such: truncated, gap, uneven times, missing values, ...

  /// From the first frame to the end of the last one, gaps included, s.
  double duration_s() const;
  /// Time of a frame from the start of the recording, s.
  double time_s(std::int64_t frame) const;
  /// First frame at or after that time.
  std::int64_t frame_at(double time_s) const;
};

}  // namespace stillmass::recording
