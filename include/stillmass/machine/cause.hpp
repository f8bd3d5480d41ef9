#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::machine {

struct Forcing;

/// A line of a spectrum.
struct Peak {
  base::Estimate frequency;  ///< Hz
  double amplitude = 0.0;    ///< r.m.s., any one quantity for all
  std::size_t channel = 0;   ///< where it was seen: lines of several channels can be judged together
  double breadth = 1.0;      ///< power under the peak over that of a steady tone (`spectral::Tone`): above 1 it wanders
};

/// What a peak is called that no force and no natural frequency explains.
inline constexpr std::string_view unexplained = "unexplained";
/// What a peak is called that a recording of the stopped machine shows too.
inline constexpr std::string_view background = "background";

/// Why there is a peak.
struct Cause {
  std::string text;                     ///< "1x", "natural frequency 24.6 Hz", `unexplained`, `background`
  std::optional<std::size_t> forcing;   ///< position in the list; absent where ambiguous or none
  std::vector<std::size_t> candidates;  ///< every forcing that fits, best first
  std::optional<std::size_t> mode;      ///< the mode within whose half-power bandwidth it lies
  bool ambiguous = false;
  base::Strength strength = base::Strength::weak;
  bool from_background = false;  ///< it is there with the machine stopped
};

/// The forcing frequencies within max(one line, 3 u) of the peak, where u joins the uncertainties of peak and forcing
/// (a peak without one: a line over sqrt 12). No fit reaches further than 2 % of the frequency and 3 lines, whichever
/// is more: an uncertain speed must not let a high harmonic explain everything.
///
/// Which of several counts: a tight fit before a loose one (loose: 3 u passes both a line and 1 % of the frequency);
/// then one before those three times as far away (a distance below its u or a quarter of a line counts as that much);
/// then the lower `rank`. A loose fit to a harmonic or a side band is a
/// candidate, but explains nothing by itself (`causes_of_peaks`). What still stands side by side cannot be told apart
/// at this resolution and is called ambiguous. `candidates` has them all.
///
/// Strong: one tight fit of rank 0; fair: one tight fit of another rank, one loose fit of rank 0, or no fit and a
/// natural frequency there (within half its half-power bandwidth and 2 u), or the background; weak: a loose fit of
/// another rank, ambiguous, or nothing. resolution_hz: spacing of the spectrum's lines, > 0. in_background: see
/// `stands_in_background`; such a peak is given no force, but keeps its candidates.
Cause cause_of_peak(const base::Estimate& frequency, double resolution_hz, std::span<const Forcing> forcing,
                    std::span<const modal::Mode> modes = {}, bool in_background = false);

/// The causes of all peaks together, in their order. As above for each; a harmonic that fits loosely (of a bearing, a
/// belt, a shaft whose speed is not well known) counts, fair, where its fundamental is the cause of another peak of the
/// same channel and the two stand at k to 1 within max(one line, 3 u). of_stopped_machine: peaks of a background
/// recording, of the same quantity; may be empty.
std::vector<Cause> causes_of_peaks(std::span<const Peak> peaks, double resolution_hz, std::span<const Forcing> forcing,
                                   std::span<const modal::Mode> modes = {},
                                   std::span<const Peak> of_stopped_machine = {});

/// Whether a recording of the stopped machine shows this peak too: a line of the same channel within max(one line, 3 u)
/// and at least `share` of its amplitude (half: common practice).
bool stands_in_background(const Peak& peak, std::span<const Peak> of_stopped_machine, double resolution_hz,
                          double share = 0.5);

}  // namespace stillmass::machine
