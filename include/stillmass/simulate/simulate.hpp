#pragma once

#include <cstddef>
#include <filesystem>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/recording/writer.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

/// The samples of one recording of the file, as stored: fractions of full scale (WAV), or values in the sensors' units
/// rounded to the recorder's bits (CSV). A function of the file alone; the same bits on any number of threads.
recording::Samples samples_of(const SkidFile& file, std::size_t recording_number, const base::Context& context = {});

/// Makes every recording of the file in `folder`, which must exist; several at a time with context.threads > 1. Gives
/// the files written, in the order of the skid file. Throws `Error` (kind file) before the long work where one of them
/// exists already.
std::vector<std::filesystem::path> write_recordings(const SkidFile& file, const std::filesystem::path& folder,
                                                    const base::Context& context = {});

}  // namespace stillmass::simulate
