#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace stillmass::tests {

/// What is wrong with the nesting of tags in a piece of HTML or SVG; empty if nothing. Knows the void elements of HTML,
/// skips what stands inside script and style.
inline std::string fault_of_markup(std::string_view text) {
  std::vector<std::string> open;
  for (auto at = text.find('<'); at != std::string_view::npos; at = text.find('<', at)) {
    const auto end = text.find('>', at);
    if (end == std::string_view::npos) return "a tag does not end";
    const std::string_view tag = text.substr(at + 1, end - at - 1);
    at = end;
    if (tag.starts_with('!')) continue;
    const bool closes = tag.starts_with('/');
    const std::string name(tag.substr(closes, tag.find_first_of(" \n/", 1) - closes));
    if (tag.find('<') != std::string_view::npos) return "< inside the tag " + name;
    if (tag.ends_with('/') || name == "meta" || name == "br") continue;
    if (!closes) {
      open.push_back(name);
      if (name == "script" || name == "style") at = text.find("</" + name, at);
      continue;
    }
    if (open.empty() || open.back() != name)
      return "</" + name + "> closes " + (open.empty() ? "nothing" : open.back());
    open.pop_back();
  }
  return open.empty() ? "" : "<" + open.back() + "> is not closed";
}

inline std::size_t count_of(std::string_view text, std::string_view part) {
  std::size_t count = 0;
  for (auto at = text.find(part); at != std::string_view::npos; at = text.find(part, at + part.size())) ++count;
  return count;
}

}  // namespace stillmass::tests
