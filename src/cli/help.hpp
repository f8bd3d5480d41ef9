#pragma once

#include <string>
#include <string_view>

namespace stillmass::cli {

/// What the program is and its commands; or, for a command, what it does and its options. From the table of options.
std::string help_text(std::string_view command);

}  // namespace stillmass::cli
