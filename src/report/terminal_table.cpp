#include <algorithm>

#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"
#include "stillmass/report/terminal.hpp"

namespace stillmass::report {
namespace {

// Columns that the text takes: bytes less the continuation bytes of UTF-8.
std::size_t width_of(const std::string& text) {
  return static_cast<std::size_t>(
      std::count_if(text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0) != 0x80; }));
}

bool starts_like_number(const std::string& cell) {
  return cell.empty() || cell == "-" || base::parse_number(cell.substr(0, cell.find(' '))).has_value();
}

}  // namespace

std::string aligned(const std::vector<std::string>& header, const std::vector<std::vector<std::string>>& rows) {
  const std::size_t columns = header.size();
  std::vector<std::size_t> width(columns);
  std::vector<bool> right(columns, !rows.empty());
  for (std::size_t c = 0; c < columns; ++c) {
    width[c] = width_of(header[c]);
    for (const auto& row : rows) {
      if (c >= row.size()) continue;
      width[c] = std::max(width[c], width_of(row[c]));
      right[c] = right[c] && starts_like_number(row[c]);
    }
  }
  const auto line = [&](const std::vector<std::string>& cells) {
    std::string out;
    for (std::size_t c = 0; c < std::min(columns, cells.size()); ++c) {
      const std::string pad(width[c] - width_of(cells[c]), ' ');
      out += "  " + (right[c] ? pad + cells[c] : cells[c] + pad);
    }
    while (!out.empty() && out.back() == ' ') out.pop_back();
    return out + "\n";
  };
  std::string out = line(header);
  for (const auto& row : rows) out += line(row);
  return out;
}

std::string wrapped(const std::string& text, std::size_t width, std::size_t indent) {
  std::string out;
  std::size_t at = 0;
  for (const std::string_view word : base::split(text, ' ')) {
    if (word.empty()) continue;
    const std::size_t size = width_of(std::string(word));
    if (at > 0 && at + 1 + size > width) {
      out += "\n" + std::string(indent, ' ');
      at = 0;
    } else if (at > 0) {
      out += ' ';
      ++at;
    }
    out += word;
    at += size;
  }
  return out;
}

}  // namespace stillmass::report
