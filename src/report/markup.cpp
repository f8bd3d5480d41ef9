#include "report/markup.hpp"

#include <fmt/format.h>

#include "stillmass/base/digest.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/page.hpp"

namespace stillmass::report {

namespace {

/// Base64 (RFC 4648) of bytes given as hexadecimal digits.
std::string base64_of_hex(std::string_view hex) {
  static constexpr std::string_view letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";
  const auto digit = [](char c) { return static_cast<unsigned>(c <= '9' ? c - '0' : c - 'a' + 10); };
  std::string out;
  unsigned bits = 0, count = 0;
  for (const char c : hex) {
    bits = (bits << 4U | digit(c)) & 0xFFFU;
    count += 4;
    if (count < 6) continue;
    count -= 6;
    out += letters[bits >> count & 0x3FU];
  }
  if (count > 0) out += letters[bits << (6 - count) & 0x3FU];
  while (out.size() % 4 != 0) out += '=';
  return out;
}

}  // namespace

std::string escaped(std::string_view text) {
  std::string flat(text);
  for (char& c : flat) {
    if (c == '\n' || c == '\r' || c == '\t') c = ' ';
  }
  std::string out;
  for (const char c : base::printable(flat)) {
    switch (c) {
      case '&':
        out += "&amp;";
        break;
      case '<':
        out += "&lt;";
        break;
      case '>':
        out += "&gt;";
        break;
      case '"':
        out += "&quot;";
        break;
      case '\'':
        out += "&#39;";
        break;
      default:
        out += c;
    }
  }
  return out;
}

std::string list_html(const std::vector<std::string>& items, bool numbered) {
  if (items.empty()) return {};
  std::string out = numbered ? "<ol>\n" : "<ul>\n";
  for (const std::string& item : items) out += fmt::format("<li>{}</li>\n", escaped(item));
  return out + (numbered ? "</ol>\n" : "</ul>\n");
}

bool is_numeric_cell(std::string_view cell) {
  cell = base::trimmed(cell);
  if (cell.empty() || cell == "-" || cell == "–" || cell == "—") return true;
  std::string ascii(cell);
  for (const std::string_view sign : {"±", "−", "–", "≤", "≥", "×"}) {
    for (auto at = ascii.find(sign); at != std::string::npos; at = ascii.find(sign))
      ascii.replace(at, sign.size(), "-");
  }
  return ascii.find_first_of("0123456789") != std::string::npos &&
         ascii.find_first_not_of("0123456789.,+-:%eE<>~() ") == std::string::npos;
}

std::string content_policy(std::span<const std::string_view> scripts) {
  std::string hashes;
  for (const std::string_view script : scripts) {
    hashes += fmt::format(" 'sha256-{}'", base64_of_hex(base::sha256(script)));
  }
  return fmt::format(
      "default-src 'none'; script-src{}; style-src 'unsafe-inline'; img-src data: blob:; base-uri 'none'; form-action "
      "'none'",
      hashes.empty() ? " 'none'" : hashes);
}

}  // namespace stillmass::report
