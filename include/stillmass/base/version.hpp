#pragma once

#include <string_view>

namespace stillmass::base {

/// "major.minor.patch", as CMakeLists.txt says it.
std::string_view version();

}  // namespace stillmass::base
