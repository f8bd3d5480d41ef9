#include "stillmass/base/text.hpp"

#include <algorithm>
#include <cstdint>
#include <numeric>

namespace stillmass::base {
namespace {

constexpr std::string_view blanks = " \t\r\n\v\f";

void append_utf8(std::string& out, std::uint32_t point) {
  const auto byte = [&](std::uint32_t value) { out.push_back(static_cast<char>(value)); };
  if (point < 0x80) {
    byte(point);
  } else if (point < 0x800) {
    byte(0xC0 | (point >> 6));
    byte(0x80 | (point & 0x3F));
  } else if (point < 0x10000) {
    byte(0xE0 | (point >> 12));
    byte(0x80 | ((point >> 6) & 0x3F));
    byte(0x80 | (point & 0x3F));
  } else {
    byte(0xF0 | (point >> 18));
    byte(0x80 | ((point >> 12) & 0x3F));
    byte(0x80 | ((point >> 6) & 0x3F));
    byte(0x80 | (point & 0x3F));
  }
}

// Length of the well-formed UTF-8 sequence at the start of the bytes; 0 where there is none (RFC 3629).
std::size_t sequence_length(std::string_view bytes) {
  const auto at = [&](std::size_t i) { return static_cast<unsigned char>(bytes[i]); };
  const auto follows = [&](std::size_t i, unsigned lo = 0x80, unsigned hi = 0xBF) {
    return i < bytes.size() && at(i) >= lo && at(i) <= hi;
  };
  const unsigned lead = at(0);
  if (lead < 0x80) return 1;
  if (lead >= 0xC2 && lead <= 0xDF) return follows(1) ? 2 : 0;
  if (lead >= 0xE0 && lead <= 0xEF) {
    const unsigned lo = lead == 0xE0 ? 0xA0 : 0x80;
    const unsigned hi = lead == 0xED ? 0x9F : 0xBF;
    return follows(1, lo, hi) && follows(2) ? 3 : 0;
  }
  if (lead >= 0xF0 && lead <= 0xF4) {
    const unsigned lo = lead == 0xF0 ? 0x90 : 0x80;
    const unsigned hi = lead == 0xF4 ? 0x8F : 0xBF;
    return follows(1, lo, hi) && follows(2) && follows(3) ? 4 : 0;
  }
  return 0;
}

std::size_t edit_distance(std::string_view a, std::string_view b) {
  std::vector<std::size_t> row(b.size() + 1);
  std::iota(row.begin(), row.end(), std::size_t{0});
  for (std::size_t i = 0; i < a.size(); ++i) {
    std::size_t diagonal = row[0];
    row[0] = i + 1;
    for (std::size_t j = 0; j < b.size(); ++j) {
      const std::size_t changed = diagonal + (a[i] == b[j] ? 0 : 1);
      diagonal = row[j + 1];
      row[j + 1] = std::min({changed, row[j] + 1, row[j + 1] + 1});
    }
  }
  return row.back();
}

}  // namespace

std::string_view trimmed(std::string_view text) {
  const auto first = text.find_first_not_of(blanks);
  if (first == std::string_view::npos) return {};
  return text.substr(first, text.find_last_not_of(blanks) - first + 1);
}

std::string lower(std::string_view text) {
  std::string out(text);
  for (char& c : out) {
    if (c >= 'A' && c <= 'Z') c = static_cast<char>(c - 'A' + 'a');
  }
  return out;
}

std::vector<std::string_view> split(std::string_view text, char separator) {
  std::vector<std::string_view> parts;
  while (true) {
    const auto end = text.find(separator);
    parts.push_back(text.substr(0, end));
    if (end == std::string_view::npos) return parts;
    text.remove_prefix(end + 1);
  }
}

bool is_utf8(std::string_view bytes) {
  while (!bytes.empty()) {
    const std::size_t length = sequence_length(bytes);
    if (length == 0) return false;
    bytes.remove_prefix(length);
  }
  return true;
}

std::string latin1_to_utf8(std::string_view bytes) {
  std::string out;
  for (const char c : bytes) append_utf8(out, static_cast<unsigned char>(c));
  return out;
}

std::string utf16_to_utf8(std::string_view bytes, bool big_endian) {
  const auto word = [&](std::size_t i) {
    const auto a = static_cast<unsigned char>(bytes[i]);
    const auto b = static_cast<unsigned char>(bytes[i + 1]);
    return static_cast<std::uint32_t>(big_endian ? (a << 8) | b : (b << 8) | a);
  };
  std::string out;
  for (std::size_t i = 0; i + 1 < bytes.size(); i += 2) {
    std::uint32_t point = word(i);
    if (point == 0xFEFF && i == 0) continue;
    if (point >= 0xD800 && point <= 0xDBFF && i + 3 < bytes.size() && word(i + 2) >= 0xDC00 && word(i + 2) <= 0xDFFF) {
      point = 0x10000 + ((point - 0xD800) << 10) + (word(i + 2) - 0xDC00);
      i += 2;
    } else if (point >= 0xD800 && point <= 0xDFFF) {
      point = 0xFFFD;
    }
    append_utf8(out, point);
  }
  return out;
}

std::string printable(std::string_view bytes) {
  std::string out = is_utf8(bytes) ? std::string(bytes) : latin1_to_utf8(bytes);
  for (std::size_t i = 0; i < out.size(); ++i) {
    const auto byte = static_cast<unsigned char>(out[i]);
    if (byte < 0x20 || byte == 0x7F) out[i] = '?';
    // U+0080 to U+009F are control characters too: C2 80 to C2 9F.
    const bool is_control = byte == 0xC2 && i + 1 < out.size() && static_cast<unsigned char>(out[i + 1]) < 0xA0;
    if (is_control) out.replace(i, 2, "?");
  }
  return out;
}

std::string safe_file_name(std::string_view name) {
  std::string out;
  for (const char c : name) {
    const bool kept =
        (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-' || c == '_' || c == '.';
    out.push_back(kept ? c : '-');
  }
  if (out.empty() || out.front() == '.') out.insert(out.begin(), '-');
  return out;
}

std::string_view nearest_name(std::string_view name, std::span<const std::string_view> candidates) {
  constexpr std::size_t longest = 100;  // nobody looks for a slip in a longer name, and the search would take long
  std::string_view best;
  if (name.size() > longest) return best;
  std::size_t least = name.size() / 3 + 2;  // more changes than that are no slip: common practice
  for (const std::string_view candidate : candidates) {
    if (candidate.size() > longest) continue;
    const std::size_t distance = edit_distance(lower(name), lower(candidate));
    if (distance < least) {
      least = distance;
      best = candidate;
    }
  }
  return best;
}

}  // namespace stillmass::base
