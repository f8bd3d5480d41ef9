#pragma once

#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <memory>
#include <string>

namespace stillmass::recording {

/// A regular file held open, read by offset: any number of readers and threads share one without disturbing each other.
class InputFile {
 public:
  /// Throws `Error` (file) for a file that is not there, may not be read, is not a regular file, or is empty. Never
  /// waits for the writer of a pipe.
  static std::shared_ptr<const InputFile> open(const std::filesystem::path& path);
  ~InputFile();
  InputFile(const InputFile&) = delete;
  InputFile& operator=(const InputFile&) = delete;

  std::int64_t size() const { return size_; }
  /// The name as given, safe to print.
  const std::string& name() const { return name_; }
  /// Reads up to `count` bytes at the offset; fewer only at the end of the file. Throws `Error` (file).
  std::size_t read_at(std::int64_t offset, char* to, std::size_t count) const;
  std::string read_at(std::int64_t offset, std::size_t count) const;

 private:
  InputFile(int descriptor, std::int64_t size, std::string name)
      : descriptor_(descriptor), size_(size), name_(std::move(name)) {}

  int descriptor_;
  std::int64_t size_;
  std::string name_;
};

}  // namespace stillmass::recording
