#pragma once

#include <string>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/recording/reader.hpp"

#include "support/temporary_folder.hpp"

namespace stillmass::tests {

/// All samples of a recording, planar, read in chunks of `frames`.
inline std::vector<std::vector<double>> all_samples(recording::Reader& reader, std::size_t frames = 1000) {
  std::vector<std::vector<double>> out(reader.recording().channels.size());
  recording::Chunk chunk;
  reader.seek(0);
  while (reader.next(chunk, frames)) {
    for (std::size_t c = 0; c < out.size(); ++c) {
      const auto samples = chunk.channel(c);
      out[c].insert(out[c].end(), samples.begin(), samples.end());
    }
  }
  return out;
}

inline std::vector<std::vector<recording::FrameRange>> all_valid(recording::Reader& reader, std::size_t frames = 1000) {
  std::vector<std::vector<recording::FrameRange>> out(reader.recording().channels.size());
  recording::Chunk chunk;
  reader.seek(0);
  while (reader.next(chunk, frames)) {
    for (std::size_t c = 0; c < out.size(); ++c) {
      const std::vector<recording::FrameRange> whole{chunk.range()};
      for (const auto& range : chunk.all_valid() ? whole : chunk.valid[c]) {
        if (!out[c].empty() && out[c].back().end == range.begin) {
          out[c].back().end = range.end;
        } else {
          out[c].push_back(range);
        }
      }
    }
  }
  return out;
}

inline const base::Finding* found(const std::vector<base::Finding>& findings, base::Code code) {
  for (const base::Finding& finding : findings) {
    if (finding.code == code) return &finding;
  }
  return nullptr;
}

/// A file with that content, opened.
class Opened {
 public:
  explicit Opened(const std::string& content, const recording::OpenOptions& options = {}) {
    write_file(folder_ / "recording", content);
    reader = recording::open(folder_ / "recording", options);
  }
  const recording::Recording& recording() const { return reader->recording(); }

 private:
  TemporaryFolder folder_;

 public:
  std::unique_ptr<recording::Reader> reader;
};

/// The error that opening that content throws; an empty problem where it opens.
inline base::Error open_error(const std::string& content, const recording::OpenOptions& options = {}) {
  try {
    const Opened opened(content, options);
  } catch (const base::Error& error) {
    return error;
  }
  return base::file_error("", "");
}

}  // namespace stillmass::tests
