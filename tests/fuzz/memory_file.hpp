#pragma once

#include <cstdint>
#include <filesystem>
#include <span>
#include <stdexcept>
#include <string>

#include <sys/mman.h>
#include <unistd.h>

namespace stillmass::tests {

/// Bytes as a regular file that can be opened by its path and never touches a disk. Linux only.
class MemoryFile {
 public:
  explicit MemoryFile(std::span<const std::uint8_t> bytes) : descriptor_(memfd_create("recording", MFD_CLOEXEC)) {
    if (descriptor_ < 0) throw std::runtime_error("no file in memory");
    for (std::size_t done = 0; done < bytes.size();) {
      const ssize_t written = write(descriptor_, bytes.data() + done, bytes.size() - done);
      if (written <= 0) {
        close(descriptor_);
        throw std::runtime_error("the file in memory cannot be filled");
      }
      done += static_cast<std::size_t>(written);
    }
  }
  ~MemoryFile() { close(descriptor_); }
  MemoryFile(const MemoryFile&) = delete;
  MemoryFile& operator=(const MemoryFile&) = delete;

  std::filesystem::path path() const { return "/proc/self/fd/" + std::to_string(descriptor_); }

 private:
  int descriptor_;
};

}  // namespace stillmass::tests
