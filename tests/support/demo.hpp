#pragma once

#include <filesystem>
#include <optional>

namespace stillmass::tests {

/// A file of data/demo.
std::filesystem::path demo_file(const char* name);
/// A measured recording that is kept beside the project, where the folder is there. A test that needs it and gets
/// nothing must say "skipped: no measured recordings here" (WARN) and return.
std::optional<std::filesystem::path> measured_recording(const char* name);

}  // namespace stillmass::tests
