#include "support/demo.hpp"

#include <cstdlib>

namespace stillmass::tests {

std::filesystem::path demo_file(const char* name) {
  return std::filesystem::path(STILLMASS_SOURCE_DIR) / "data" / "demo" / name;
}

std::optional<std::filesystem::path> measured_recording(const char* name) {
  const char* folder = std::getenv("STILLMASS_RECORDINGS");
  const auto file = std::filesystem::path(folder != nullptr ? folder : STILLMASS_SHARED_RECORDINGS) / name;
  if (!std::filesystem::exists(file)) return {};
  return file;
}

}  // namespace stillmass::tests
