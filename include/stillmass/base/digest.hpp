#pragma once

#include <filesystem>
#include <string>
#include <string_view>

namespace stillmass::base {

/// SHA-256 as 64 lower-case hexadecimal digits.
std::string sha256(std::string_view bytes);
/// Of a file's content, read in blocks. Throws `Error` of kind `file`.
std::string sha256_of_file(const std::filesystem::path& file);

}  // namespace stillmass::base
