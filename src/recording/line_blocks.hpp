#pragma once

#include <cstdint>
#include <string_view>
#include <vector>

#include "recording/text_source.hpp"

namespace stillmass::recording {

/// A text cut into blocks of whole lines, so that memory stays small and the lines of a block lie side by side.
class LineBlocks {
 public:
  /// `decimal_comma`: every comma becomes a point.
  LineBlocks(const TextSource& text, bool decimal_comma) : text_(&text), decimal_comma_(decimal_comma) {}

  /// The next block starts at that offset, which must be the start of a line.
  void seek(std::int64_t offset);
  /// The next whole lines, always closed by '\n'; empty at the end. Valid until the next call. Throws `Error` (file)
  /// for a line of more than 1 MiB.
  std::string_view next();
  /// Offset of the block that `next` gave.
  std::int64_t offset() const { return block_offset_; }

 private:
  const TextSource* text_;
  bool decimal_comma_;
  std::int64_t read_to_ = 0;  // offset of the next byte to read
  std::int64_t block_offset_ = 0;
  std::size_t block_ = 0;  // bytes of the block in the buffer
  std::size_t held_ = 0;   // bytes in the buffer
  std::vector<char> buffer_;
};

}  // namespace stillmass::recording
