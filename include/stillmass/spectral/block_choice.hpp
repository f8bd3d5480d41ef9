#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

#include "stillmass/recording/recording.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// What decided the length of the blocks.
enum class BlockReason {
  frames_asked,      ///< given as a number of frames
  resolution_asked,  ///< lines so far apart were asked for
  lines_asked,       ///< so many lines were asked for
  usual,             ///< nothing more was known: 0.25 to 1 Hz, as fine as 64 blocks allow
  usual_separates,   ///< the same, and it tells the forcing frequencies apart
  separation,        ///< made finer, so that the forcing frequencies are told apart
  averages,          ///< as fine as 16 averages allow: not fine enough to tell them apart
  memory,            ///< as fine as the samples held allow: not fine enough to tell them apart
};
std::string_view name(BlockReason reason);  ///< lower-case words joined by hyphens

/// The block length, and why.
struct BlockChoice {
  std::size_t length = 0;  ///< frames
  BlockReason reason = BlockReason::usual;
  double line_hz = 0.0;
  std::int64_t averages = 0;                ///< blocks that fit with the overlap, before any is lost to invalid samples
  double effective_averages = 0.0;          ///< independent ones that these are worth; not of peak hold
  std::optional<double> separate_hz;        ///< distance of frequencies that was to be told apart, where one was known
  std::optional<double> needed_line_hz;     ///< the spacing that this takes
  std::optional<double> needed_duration_s;  ///< recording that would do, where the averages forbid that spacing

  /// True unless frequencies that should be told apart are not.
  bool separates() const { return !needed_line_hz || line_hz <= *needed_line_hz * (1.0 + 1e-9); }
  /// The reason as a sentence with its numbers, for people.
  std::string text() const;
};

/// Spacing of lines at which two equal tones that far apart have a valley of 6 dB or more between them, wherever they
/// stand: their distance over (half the window's lobe in lines + 1), for the rectangle over 3. Checked by simulation in
/// the tests.
double separating_line_hz(Window window, double distance_hz);

/// The block length for a recording and what was asked of it: `block_frames`, else `lines`, else `resolution_hz`, else
/// as `block_length` chooses; and if that does not tell apart frequencies `separate_hz` from one another (or, where
/// only the speed is known, half the running speed: orders and half orders), the shortest fast length that does, as
/// long as 16 blocks and the samples held allow it; what they allow otherwise. Throws `Error` (usage) for what the
/// range cannot give.
BlockChoice choose_block(const recording::Recording& recording, recording::FrameRange range,
                         const SpectrumOptions& options);

}  // namespace stillmass::spectral
