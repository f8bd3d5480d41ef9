#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/recording/reader.hpp"

#include "recording/csv_reader.hpp"
#include "recording/input_file.hpp"
#include "recording/sound_recording.hpp"

namespace stillmass::recording {

std::unique_ptr<Reader> open(const std::filesystem::path& path, const OpenOptions& options,
                             const base::Context& context) {
  auto file = InputFile::open(path);
  if (options.rate_hz && !(std::isfinite(*options.rate_hz) && *options.rate_hz > 0.0)) {
    throw base::usage_error(file->name(), "the sampling rate is not a positive number", "give it in Hz");
  }
  if (is_sound(file->read_at(0, 4))) return open_sound(std::move(file), path, options);
  return open_csv(std::move(file), path, options, context);
}

}  // namespace stillmass::recording
