#pragma once

#include <string_view>
#include <vector>

#include "stillmass/base/settings.hpp"

namespace stillmass::base {

/// The text of data/tables/NAME ("severity.toml"), which travels inside the program; empty for an unknown name.
std::string_view table_text(std::string_view file_name);

/// The rows `[[row]]` of a table, strictly read with the row's keys ("row.standard", ...). Every row must have a
/// `source`. Throws `Error` of kind internal: a wrong table is a fault of the program.
std::vector<Settings::Table> table_rows(std::string_view file_name, std::span<const Key> keys);

}  // namespace stillmass::base
