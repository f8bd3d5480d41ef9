#pragma once

#include <memory>

#include "stillmass/recording/reader.hpp"

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// Opens a text file: recognises how it is written, reads the times in a first pass, and gives a reader that reads the
/// values in a second one. Throws `Error` (file, usage).
std::unique_ptr<Reader> open_csv(std::shared_ptr<const InputFile> file, const std::filesystem::path& path,
                                 const OpenOptions& options, const base::Context& context);

}  // namespace stillmass::recording
