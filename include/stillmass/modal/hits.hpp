#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"

namespace stillmass::modal {

/// What became of a blow.
enum class HitVerdict {
  used,
  double_hit,  ///< the hammer bounced: a second pulse after the first
  weak_hit,    ///< far below the others
  overload,    ///< force or a response at full scale or flat-topped
  too_close,   ///< the next blow came before the response had time to die away
  cut_off,     ///< the recording begins, pauses or ends too close to it
};
std::string_view name(HitVerdict verdict);

/// One blow found in a recording.
struct Hit {
  double time_s = 0.0;              ///< beginning of contact, from the start of the recording
  std::int64_t first_frame = 0;     ///< the frame of that time
  double peak = 0.0;                ///< N; of a ring-down without a force channel: the response's peak, SI
  std::optional<double> contact_s;  ///< time above a tenth of the peak; absent without a force channel
  HitVerdict verdict = HitVerdict::used;
  bool used = true;
  std::string reason;  ///< one clause with the numbers; empty for a used hit
};

/// The samples of one used blow, from `onset` frames before contact until the response has died away or the next blow
/// comes. All blocks of one search have the same length.
struct HitBlocks {
  double time_s = 0.0;
  double rate_hz = 0.0;
  std::size_t onset = 0;        ///< index of the first frame of contact; 0 without force: the response's rise
  std::size_t contact_end = 0;  ///< index past the last frame of contact
  std::vector<double> force;    ///< N, offset removed, 0 outside the force window; empty: no force
  std::vector<std::vector<double>> responses;  ///< SI, offset removed, one a response channel
};

/// The channels of a search, counted from 0 in the order of the recording; default: every channel of that role.
struct HitOptions {
  std::optional<std::size_t> force;
  std::vector<std::size_t> responses;
  recording::FrameRange range{0, 0};  ///< empty: the whole recording
  double max_block_s = 20.0;          ///< no block is longer
  bool ignore_force = false;          ///< blows are found in the responses even if there is a force channel
};

/// A response as the recording names it.
struct ResponseName {
  std::string channel;
  std::string point;                                       ///< may be empty
  base::Quantity quantity = base::Quantity::acceleration;  ///< acceleration, velocity or displacement
  std::optional<double> factor_u;                          ///< relative, of its calibration
};

struct HitSearch {
  std::vector<Hit> hits;                ///< in the order of time, used or not
  std::vector<HitBlocks> blocks;        ///< one a used hit
  std::vector<ResponseName> responses;  ///< same order as HitBlocks::responses
  std::string force_point;              ///< of the force channel; may be empty
  std::optional<double> force_factor_u;
  std::vector<base::Finding> findings;  ///< one for each kind of refused hit
};

/// Finds the blows of a hammer (or, without a force channel, the onsets of ring-downs) in a recording, judges each and
/// cuts out the blocks of the good ones. A blow is a pulse of the force above 2 % of the highest and 8 times the noise;
/// without force a rise of the response above twice its level of the last 0.5 s, 10 % of the highest and 8 times the
/// noise. Refused: a second pulse of 4 % within 0.5 s and after the force window; a peak under a quarter of the median;
/// clipping; less than 0.5 s to the next blow or the end, or less than the response takes to die away, up to 0.8 of the
/// usual time (common practice, all of them). The force window is 1 over contact and its filter's ringing (at least 16
/// frames more), then falls to 0. Memory: the used blocks and about 100 bytes for every 20 ms of the recording. No blow
/// at all gives an empty list, no error. Throws what the reader throws, `Stopped`, and `Error` (usage) for a channel
/// that is not there or no vibration channel at all.
HitSearch find_hits(recording::Reader& reader, const HitOptions& options, const base::Context& context);

}  // namespace stillmass::modal
