#pragma once

#include <cstdint>
#include <optional>

#include "recording/input_file.hpp"

namespace stillmass::recording {

/// Frames that an AIFF or AIFC file promises: by its COMM chunk and by the size of its SSND chunk, the smaller where
/// they differ; one that was never filled in (0 or all bits set) does not count. Nothing for another file or where
/// neither says.
std::optional<std::int64_t> promised_form_frames(const InputFile& file);

}  // namespace stillmass::recording
