#pragma once

#include <cmath>
#include <cstdint>
#include <cstring>
#include <numbers>
#include <vector>

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include "timing.hpp"

namespace bench {

/// The samples of a plain WAV file (header of 44 bytes) of 32-bit floats or 24-bit integers, by frame: no library.
class Samples {
 public:
  Samples(const char* path, int channels, int bytes) : channels_(channels), bytes_(bytes) {
    file_ = ::open(path, O_RDONLY | O_CLOEXEC);
    struct stat status {};
    if (file_ < 0 || ::fstat(file_, &status) != 0) fail("cannot be opened");
    frames_ = (status.st_size - header) / (channels * bytes);
  }

  std::int64_t frames() const { return frames_; }
  int channels() const { return channels_; }

  /// planar[c * count + i]: channel c of frame first + i.
  void read(std::int64_t first, std::size_t count, std::vector<char>& raw, std::vector<double>& planar) const {
    const std::size_t wide = static_cast<std::size_t>(channels_ * bytes_);
    raw.resize(count * wide + 4);
    planar.resize(count * static_cast<std::size_t>(channels_));
    if (::pread(file_, raw.data(), count * wide, header + first * static_cast<std::int64_t>(wide)) < 0) fail("read");
    for (std::size_t c = 0; c < static_cast<std::size_t>(channels_); ++c) {
      const char* at = raw.data() + c * static_cast<std::size_t>(bytes_);
      double* const to = planar.data() + c * count;
      for (std::size_t i = 0; i < count; ++i, at += wide) to[i] = bytes_ == 4 ? as_float(at) : as_24_bit(at);
    }
  }

 private:
  static constexpr std::int64_t header = 44;

  static double as_float(const char* at) {
    float value = 0.0F;
    std::memcpy(&value, at, sizeof value);
    return static_cast<double>(value);
  }
  static double as_24_bit(const char* at) {
    std::uint32_t value = 0;
    std::memcpy(&value, at, sizeof value);
    return static_cast<double>(static_cast<std::int32_t>(value << 8)) * (1.0 / 2147483648.0);
  }

  int file_ = -1;
  int channels_;
  int bytes_;
  std::int64_t frames_ = 0;
};

inline std::vector<double> hann(std::size_t n) {
  std::vector<double> w(n);
  for (std::size_t i = 0; i < n; ++i) {
    w[i] = 0.5 - 0.5 * std::cos(2.0 * std::numbers::pi * static_cast<double>(i) / static_cast<double>(n));
  }
  return w;
}

}  // namespace bench
