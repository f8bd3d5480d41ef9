#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

namespace stillmass::report {

/// "<ul>" or "<ol>" with the items escaped; empty for no items.
std::string list_html(const std::vector<std::string>& items, bool numbered);

/// A cell that is a number, a value with its uncertainty, a range, or empty.
bool is_numeric_cell(std::string_view cell);

/// The value of a Content-Security-Policy that allows the document's own styles, images made in place and exactly these
/// scripts, and no connection at all. The scripts' hashes stand in it, so that no text that slipped in can ever run.
std::string content_policy(std::span<const std::string_view> scripts);

}  // namespace stillmass::report
