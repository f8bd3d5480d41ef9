#include "stillmass/step/part.hpp"

#include <algorithm>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"

namespace stillmass::step {

recording::FrameRange frames_of(const recording::Recording& recording, const Part& part) {
  recording::FrameRange range{0, recording.frames};
  if (part.from_s) range.begin = std::min(recording.frame_at(*part.from_s), recording.frames);
  if (part.to_s) range.end = std::min(recording.frame_at(*part.to_s), recording.frames);
  if (range.size() == 0) {
    throw base::usage_error(recording.file.string(), "the part asked for holds no samples",
                            "the recording lasts " + base::rounded(recording.duration_s(), 4) + " s");
  }
  return range;
}

}  // namespace stillmass::step
