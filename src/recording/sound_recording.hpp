#pragma once

#include <memory>
#include <string_view>

#include "stillmass/recording/reader.hpp"

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// True where the first bytes are those of a sound file that `open_sound` knows: RIFF, RIFX, RF64, BW64, W64, AIFF,
/// FLAC.
bool is_sound(std::string_view first_bytes);

/// Opens a sound file through libsndfile. Taken are integer samples of 8 to 32 bits, float and double. Throws `Error`
/// (file) for another coding, a broken header or no samples.
std::unique_ptr<Reader> open_sound(std::shared_ptr<const InputFile> file, const std::filesystem::path& path,
                                   const OpenOptions& options);

}  // namespace stillmass::recording
