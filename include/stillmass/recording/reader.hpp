#pragma once

#include <cstdint>
#include <filesystem>
#include <memory>
#include <optional>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/recording/chunk.hpp"
#include "stillmass/recording/text_options.hpp"

namespace stillmass::recording {

/// A recording as a stream of calibrated chunks. Memory does not grow with the recording's length.
class Reader {
 public:
  virtual ~Reader() = default;

  const Recording& recording() const { return *recording_; }
  /// The next chunk starts at that frame (0 <= frame <= frames).
  virtual void seek(std::int64_t frame) = 0;
  /// Fills the chunk with up to `max_frames` frames of one segment; false at the end. Throws `Error` (kind file).
  virtual bool next(Chunk& chunk, std::size_t max_frames) = 0;
  /// A second handle with its own position, for another thread; cheap: nothing is scanned again.
  virtual std::unique_ptr<Reader> second() const = 0;

 protected:
  std::shared_ptr<const Recording> recording_;
};

/// What the user says of a recording; whatever is absent is taken from the file.
struct OpenOptions {
  std::vector<ChannelSetting> channels;
  std::optional<double> rate_hz;  ///< a CSV without a time column needs it
  TextOptions text;
};

/// Opens by content, not by name. Throws `Error` of kind `file` (not there, not a regular file, not understood, empty)
/// or `usage` (an option that does not fit: channel index out of range, no rate).
std::unique_ptr<Reader> open(const std::filesystem::path& file, const OpenOptions& options = {},
                             const base::Context& context = {});

}  // namespace stillmass::recording
