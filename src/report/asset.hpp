#pragma once

#include <string_view>

namespace stillmass::report {

/// A file that was embedded when the program was built: "plotly.js", "page.css", "page.js", "result-1.schema.json".
/// Empty for a name that is not known.
std::string_view asset(std::string_view file_name);

}  // namespace stillmass::report
