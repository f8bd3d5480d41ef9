#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/recording/overview.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/recording/sample_quality.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/step/part.hpp"

namespace stillmass::step {

/// Is the recording good? Good: use it. Doubtful: usable with the findings in mind. Unusable: take it again.
enum class Verdict { good, doubtful, unusable };
std::string_view name(Verdict verdict);

struct CheckRequest {
  Part part;
  std::optional<double> line_frequency_hz;  ///< of the supply; without it 50 and 60 Hz are tried for hum
  int pulses_per_turn = 1;                  ///< of a tacho channel
  bool falling_edge = false;                ///< its edge that counts
  std::size_t overview_columns = 1200;
};

struct ChannelCheck {
  recording::Channel channel;
  Verdict verdict = Verdict::good;
  recording::ChannelQuality quality;
  std::vector<base::Finding> findings;  ///< worst first
};

struct CheckResult {
  recording::Recording recording;
  recording::FrameRange range;
  std::vector<ChannelCheck> channels;
  std::vector<base::Finding> findings;  ///< of the recording as a whole
  recording::OverviewPicture overview;
  std::vector<spectral::Spectrum> spectra;  ///< empty where the recording is too short for one
  Verdict verdict = Verdict::good;          ///< the worst of the channels and of the recording
};

/// What a finding does to the verdict of its channel (common practice). A force channel that is cut off at one blow is
/// doubtful, not unusable: the blow is left out, the others count.
Verdict weight(const base::Finding& finding, recording::Role role = recording::Role::vibration);

/// Everything in one pass over the recording. Throws what the reader throws, `Stopped`, and `Error` (usage) for an
/// empty part.
CheckResult check(const recording::Reader& reader, const CheckRequest& request, const base::Context& context);

}  // namespace stillmass::step
