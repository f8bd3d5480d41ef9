#include "recording/riff_header.hpp"

#include <algorithm>
#include <string>
#include <string_view>

namespace stillmass::recording {
namespace {

constexpr int max_chunks = 10000;  // before the samples; a walk over noise ends

enum class Family { riff, rf64, w64 };

// Bytes of the file as numbers in the family's order.
class Walker {
 public:
  Walker(const InputFile& file, bool big_endian) : file_(file), big_endian_(big_endian) {}

  std::string name(std::int64_t at) const { return file_.read_at(at, 4); }
  /// 0 beyond the end of the file.
  std::uint64_t number(std::int64_t at, int bytes) const {
    const std::string raw = file_.read_at(at, static_cast<std::size_t>(bytes));
    std::uint64_t value = 0;
    for (std::size_t i = 0; i < raw.size(); ++i) {
      const std::size_t from = big_endian_ ? i : raw.size() - 1 - i;
      value = (value << 8) | static_cast<unsigned char>(raw[from]);
    }
    return value;
  }

 private:
  const InputFile& file_;
  bool big_endian_;
};

void read_format(const Walker& walker, std::int64_t at, RiffHeader& header) {
  constexpr int extensible = 0xFFFE;
  header.format_tag = static_cast<int>(walker.number(at, 2));
  header.channels = static_cast<int>(walker.number(at + 2, 2));
  header.rate_hz = static_cast<std::int64_t>(walker.number(at + 4, 4));
  header.frame_bytes = static_cast<int>(walker.number(at + 12, 2));
  header.bits = static_cast<int>(walker.number(at + 14, 2));
  if (header.format_tag == extensible) header.format_tag = static_cast<int>(walker.number(at + 24, 2));
  const int least_bytes = (header.bits + 7) / 8;
  // 24 bits in 4 bytes are seen; else a sample takes the bytes that its bits need.
  const bool agrees = header.channels > 0 && header.frame_bytes % header.channels == 0 &&
                      (header.sample_bytes() == least_bytes || (header.bits == 24 && header.sample_bytes() == 4));
  if (!agrees) header.frame_bytes = header.channels * least_bytes;
}

// Sizes of the data chunk: what the header says against what is there.
void settle_sizes(Family family, std::uint64_t declared, bool header_complete, std::int64_t file_size,
                  RiffHeader& header) {
  constexpr std::uint64_t wrap = std::uint64_t{1} << 32;
  const auto there = static_cast<std::uint64_t>(file_size - header.data_offset);
  constexpr std::uint64_t sane = std::uint64_t{1} << 62;
  const bool never_written = family == Family::riff ? declared == wrap - 1 || (declared == 0 && !header_complete)
                                                    : declared > sane || (declared == 0 && there > 0);
  if (family == Family::riff && !never_written && there > declared) {
    declared += (there - declared) / wrap * wrap;
  }
  if (!never_written) header.declared_bytes = static_cast<std::int64_t>(declared);
  header.real_bytes = static_cast<std::int64_t>(never_written ? there : std::min(there, declared));
  if (header.frame_bytes > 0) header.real_bytes -= header.real_bytes % header.frame_bytes;
}

}  // namespace

std::optional<std::int64_t> RiffHeader::declared_frames() const {
  if (!declared_bytes || frame_bytes <= 0) return {};
  return *declared_bytes / frame_bytes;
}

std::optional<RiffHeader> read_riff_header(const InputFile& file) {
  const std::string magic = file.read_at(0, 4);
  const bool big_endian = magic == "RIFX";
  Family family = Family::riff;
  if (magic == "RF64" || magic == "BW64") {
    family = Family::rf64;
  } else if (magic == "riff") {
    family = Family::w64;
  } else if (magic != "RIFF" && !big_endian) {
    return {};
  }

  const Walker walker(file, big_endian);
  const bool wide = family == Family::w64;
  if (walker.name(wide ? 24 : 8) != (wide ? "wave" : "WAVE")) return {};

  RiffHeader header;
  header.big_endian = big_endian;
  const bool header_complete = static_cast<std::int64_t>(walker.number(4, 4)) + 8 == file.size();
  std::uint64_t data_size_64 = 0;
  bool format_seen = false;
  std::int64_t at = wide ? 40 : 12;
  const std::int64_t head = wide ? 24 : 8;
  for (int chunk = 0; chunk < max_chunks && at + head <= file.size(); ++chunk) {
    const std::string name = walker.name(at);
    std::uint64_t size = wide ? walker.number(at + 16, 8) : walker.number(at + 4, 4);
    if (wide) size -= std::min<std::uint64_t>(size, 24);
    const std::int64_t body = at + head;
    if (name == "ds64") data_size_64 = walker.number(body + 8, 8);
    if (name == "fmt ") {
      read_format(walker, body, header);
      format_seen = true;
    }
    if (name == "data") {
      header.data_offset = body;
      const bool in_ds64 = family == Family::rf64 && size == 0xFFFFFFFF;
      settle_sizes(family, in_ds64 ? data_size_64 : size, header_complete, file.size(), header);
      return format_seen ? std::optional(header) : std::nullopt;
    }
    const std::uint64_t aligned = wide ? (size + 7) & ~std::uint64_t{7} : size + (size & 1);
    if (aligned > static_cast<std::uint64_t>(file.size())) return {};
    at = body + static_cast<std::int64_t>(aligned);
  }
  return {};
}

}  // namespace stillmass::recording
