#pragma once

#include <cstdint>
#include <memory>
#include <string>

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// A text file as bytes with '\n' line ends, read by offset. A byte order mark is left out; UTF-16 (with
/// or without such a mark) is narrowed to one
/// byte a character (Latin-1; a Greek mu becomes the micro sign, other characters '?'), so that offsets stay
/// proportional and memory does not grow with the file.
class TextSource {
 public:
  /// Throws `Error` (file) where the beginning is not text.
  explicit TextSource(std::shared_ptr<const InputFile> file);

  std::int64_t size() const { return size_; }
  const InputFile& file() const { return *file_; }
  /// Bytes of zero (or an end mark of old) at the end of the file, which do not belong to the text.
  std::int64_t padding() const { return padding_; }
  /// Fewer than `count` only at the end.
  std::size_t read_at(std::int64_t offset, char* to, std::size_t count) const;
  /// Bytes of this text as UTF-8: as they are where they are UTF-8, else taken for Latin-1.
  std::string utf8(std::string_view bytes) const;

 private:
  void find_encoding(std::string_view head);
  void leave_out_padding();

  enum class Encoding { bytes, utf16_little, utf16_big };

  std::shared_ptr<const InputFile> file_;
  Encoding encoding_ = Encoding::bytes;
  bool carriage_returns_ = false;  // the only line ends
  std::int64_t begin_ = 0;         // in the file
  std::int64_t size_ = 0;          // in characters as read
  std::int64_t padding_ = 0;
};

}  // namespace stillmass::recording
