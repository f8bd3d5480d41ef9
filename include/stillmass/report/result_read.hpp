#pragma once

#include <filesystem>
#include <vector>

#include "stillmass/modal/mode.hpp"

namespace stillmass::report {

/// The modes of a saved JSON result (of bump, survey or spectrum). Throws `Error`: kind `file` where it cannot be read
/// or is not a result of this program.
std::vector<modal::Mode> read_modes(const std::filesystem::path& file);

}  // namespace stillmass::report
