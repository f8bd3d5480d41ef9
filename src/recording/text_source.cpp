#include "recording/text_source.hpp"

#include <algorithm>
#include <array>
#include <string_view>

#include "stillmass/base/error.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t probe_bytes = 64 * 1024;
constexpr std::size_t damaged_share = 100;   // one control character in so many is damage, more are no text
constexpr std::size_t unmarked_bytes = 512;  // looked at for UTF-16 without a byte order mark

bool is_control(char c) {
  const auto byte = static_cast<unsigned char>(c);
  return (byte < 0x20 && c != '\t' && c != '\n' && c != '\r' && c != '\f') || byte == 0x7F;
}

// Files that people mistake for recordings, by their first bytes.
struct Foreign {
  std::string_view start;
  std::string_view what;
  std::string_view remedy;
};
constexpr auto foreign_files = std::to_array<Foreign>({
    {"PK\x03\x04", "is a zip archive or a spreadsheet", "save the table as CSV text"},
    {"\xD0\xCF\x11\xE0", "is an office document", "save the table as CSV text"},
    {"\x89HDF", "is an HDF5 file", "export the signals as WAV or CSV"},
    {"%PDF", "is a PDF document", "export the signals as WAV or CSV"},
    {"OggS", "is compressed sound", "save it as WAV or FLAC from the recorder; lossy coding changes the signal"},
    {"ID3", "is compressed sound", "save it as WAV or FLAC from the recorder; lossy coding changes the signal"},
});

}  // namespace

TextSource::TextSource(std::shared_ptr<const InputFile> file) : file_(std::move(file)) {
  const std::string head = file_->read_at(0, probe_bytes);
  for (const Foreign& foreign : foreign_files) {
    if (head.starts_with(foreign.start)) {
      throw base::file_error(file_->name(), std::string(foreign.what), std::string(foreign.remedy));
    }
  }
  find_encoding(head);
  size_ = file_->size() - begin_;
  if (encoding_ != Encoding::bytes) size_ /= 2;
  leave_out_padding();
  if (size_ == 0) {
    throw base::file_error(file_->name(), "holds nothing but zeros", "copy it again from the recorder");
  }

  std::string text(probe_bytes, '\0');
  text.resize(read_at(0, text.data(), text.size()));
  const auto controls = static_cast<std::size_t>(std::count_if(text.begin(), text.end(), is_control));
  if (controls > text.size() / damaged_share) {
    throw base::file_error(file_->name(), "is neither a sound file nor text",
                           "give a recording as WAV, RF64, W64, FLAC, AIFF or as CSV text");
  }
  carriage_returns_ = text.find('\n') == std::string::npos && text.find('\r') != std::string::npos;
}

// A byte order mark says it; without one, text of Latin letters in UTF-16 has a zero in every other byte.
void TextSource::find_encoding(std::string_view head) {
  if (head.starts_with("\xFF\xFE")) {
    encoding_ = Encoding::utf16_little;
    begin_ = 2;
  } else if (head.starts_with("\xFE\xFF")) {
    encoding_ = Encoding::utf16_big;
    begin_ = 2;
  } else if (head.starts_with("\xEF\xBB\xBF")) {
    begin_ = 3;
  } else {
    const std::size_t pairs = std::min(head.size(), unmarked_bytes) / 2;
    std::array<std::size_t, 2> zeros{};
    for (std::size_t i = 0; i < 2 * pairs; ++i) zeros[i % 2] += head[i] == '\0' ? 1 : 0;
    if (zeros[0] == 0 && 10 * zeros[1] >= 9 * pairs && pairs > 1) encoding_ = Encoding::utf16_little;
    if (zeros[1] == 0 && 10 * zeros[0] >= 9 * pairs && pairs > 1) encoding_ = Encoding::utf16_big;
  }
}

void TextSource::leave_out_padding() {
  const std::int64_t width = encoding_ == Encoding::bytes ? 1 : 2;
  const std::int64_t written = size_;
  std::string block;
  while (size_ > 0) {
    const auto count = static_cast<std::size_t>(std::min<std::int64_t>(size_, probe_bytes));
    block.resize(count);
    block.resize(read_at(size_ - static_cast<std::int64_t>(count), block.data(), count));
    const auto last = block.find_last_not_of(std::string_view("\0\x1A", 2));
    size_ -= static_cast<std::int64_t>(block.size() - (last == std::string::npos ? 0 : last + 1));
    if (last != std::string::npos || block.size() < count) break;
  }
  padding_ = (written - size_) * width;
}

std::size_t TextSource::read_at(std::int64_t offset, char* to, std::size_t count) const {
  const std::int64_t left = std::max<std::int64_t>(0, size_ - offset);
  count = static_cast<std::size_t>(std::min(left, static_cast<std::int64_t>(count)));
  if (encoding_ == Encoding::bytes) {
    count = file_->read_at(begin_ + offset, to, count);
  } else {
    const std::string wide = file_->read_at(begin_ + 2 * offset, 2 * count);
    const std::size_t low = encoding_ == Encoding::utf16_little ? 0 : 1;
    count = wide.size() / 2;
    for (std::size_t i = 0; i < count; ++i) {
      const auto point = static_cast<unsigned>(static_cast<unsigned char>(wide[2 * i + low])) |
                         static_cast<unsigned>(static_cast<unsigned char>(wide[2 * i + 1 - low])) << 8;
      constexpr unsigned greek_mu = 0x3BC;
      constexpr unsigned micro = 0xB5;
      constexpr unsigned minus = 0x2212;
      const unsigned plain = point == greek_mu ? micro : (point == minus ? '-' : point);
      to[i] = static_cast<char>(plain < 0x100 ? plain : '?');
    }
  }
  if (carriage_returns_) std::replace(to, to + count, '\r', '\n');
  return count;
}

std::string TextSource::utf8(std::string_view bytes) const {
  if (encoding_ == Encoding::bytes && base::is_utf8(bytes)) return std::string(bytes);
  return base::latin1_to_utf8(bytes);
}

}  // namespace stillmass::recording
