#include "recording/line_blocks.hpp"

#include <algorithm>
#include <cstring>

#include "stillmass/base/error.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t read_bytes = 256 * 1024;
constexpr std::size_t longest_line = 1024 * 1024;

}  // namespace

void LineBlocks::seek(std::int64_t offset) {
  read_to_ = offset;
  block_offset_ = offset;
  block_ = 0;
  held_ = 0;
}

std::string_view LineBlocks::next() {
  block_offset_ += static_cast<std::int64_t>(block_);
  held_ -= block_;
  if (held_ > 0) std::memmove(buffer_.data(), buffer_.data() + block_, held_);
  block_ = 0;
  while (true) {
    buffer_.resize(std::max(buffer_.size(), held_ + read_bytes + 1));
    char* const fresh = buffer_.data() + held_;
    const std::size_t got = text_->read_at(read_to_, fresh, read_bytes);
    if (decimal_comma_) std::replace(fresh, fresh + got, ',', '.');
    read_to_ += static_cast<std::int64_t>(got);
    held_ += got;
    if (got == 0) {
      if (held_ > 0) buffer_[held_++] = '\n';
      block_ = held_;
      return {buffer_.data(), block_};
    }
    const std::string_view all(buffer_.data(), held_);
    const auto end = all.rfind('\n');
    if (end != std::string_view::npos) {
      block_ = end + 1;
      return all.substr(0, block_);
    }
    if (held_ > longest_line) {
      throw base::file_error(text_->file().name(), "has a line of more than 1 MiB, so it is not a table of numbers",
                             "export it again with one row of samples a line");
    }
  }
}

}  // namespace stillmass::recording
