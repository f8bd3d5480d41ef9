#pragma once

#include <cstdint>
#include <memory>
#include <string>

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// A text file as bytes with '\n' line ends, read by offset. A byte order mark is left out; UTF-16 is narrowed to one
/// byte a character (Latin-1; a Greek mu becomes the micro sign, other characters '?'), so that offsets stay
/// proportional and memory does not grow with the file.
class TextSource {
 public:
  /// Throws `Error` (file) where the beginning is not text.
  explicit TextSource(std::shared_ptr<const InputFile> file);

  std::int64_t size() const { return size_; }
  const InputFile& file() const { return *file_; }
  /// Fewer than `count` only at the end.
  std::size_t read_at(std::int64_t offset, char* to, std::size_t count) const;
  /// Bytes of this text as UTF-8: as they are where they are UTF-8, else taken for Latin-1.
  std::string utf8(std::string_view bytes) const;

 private:
  enum class Encoding { bytes, utf16_little, utf16_big };

  std::shared_ptr<const InputFile> file_;
  Encoding encoding_ = Encoding::bytes;
  bool carriage_returns_ = false;  // the only line ends
  std::int64_t begin_ = 0;         // in the file
  std::int64_t size_ = 0;          // in characters as read
};

}  // namespace stillmass::recording
