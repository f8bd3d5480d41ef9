#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/machine/description.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::machine {

enum class ForcingKind { rotation, vane_pass, electrical, pole_pass, gear_mesh, bearing };
std::string_view name(ForcingKind kind);

/// A frequency at which the machine pushes.
struct Forcing {
  std::string name;  ///< "1x", "vane pass (6x)", "twice line frequency", "1x - pole pass", ...
  ForcingKind kind = ForcingKind::rotation;
  base::Estimate frequency;     ///< Hz
  std::optional<double> order;  ///< over the running speed, where it follows the speed
};

/// A line of a spectrum.
struct Peak {
  base::Estimate frequency;  ///< Hz
  double amplitude = 0.0;    ///< r.m.s., any one quantity for all
};

/// All forcing frequencies of the machine at this running speed (Hz, with u), ascending: 1x to `harmonics`, vane pass
/// and its double (they stand in place of the harmonic of the same order), other shafts and gear mesh, bearing
/// frequencies (1 % added to u for slip), twice the line frequency, pole-pass side bands of 1x. The line frequency has
/// a standard uncertainty of 0.02 Hz (common practice for a public grid). On a drive the electrical frequency is that
/// of the speed, poles / 2 times speed, plus up to 3 % slip (common practice), and pole-pass bands are left out. Pole
/// pass: poles times (synchronous speed - speed) = 2 slip line frequency.
std::vector<Forcing> forcing_frequencies(const Machine& machine, const base::Estimate& speed, int harmonics = 6);

/// The running speed from a spectrum: the strongest peak within the slip range of the nominal speed. For an induction
/// motor on the line that is [0.92, 1.0] of the synchronous speed if the nominal speed lies there (full-load slip of
/// small motors, common practice), else nominal +- 3 %; for a declared speed range, that range. Refused
/// (`speed-unknown`): no nominal speed or no peak there; two peaks within 6 dB of each other.
base::Answer<base::Estimate> running_speed(std::span<const Peak> peaks, const Machine& machine);

/// Why there is a peak.
struct Cause {
  std::string text;                     ///< "1x", "natural frequency 24.6 Hz", "unknown"
  std::optional<std::size_t> forcing;   ///< position in the list; absent where ambiguous or none
  std::vector<std::size_t> candidates;  ///< every forcing that fits, best first
  std::optional<std::size_t> mode;      ///< the mode within whose half-power bandwidth it lies
  bool ambiguous = false;
  base::Strength strength = base::Strength::weak;
};

/// The forcing frequencies within max(one line, 3 u) of the peak, where u joins the uncertainties of peak and forcing
/// (a peak without one: a line over sqrt 12). A fit is loose where 3 u passes both a line and 1 % of the frequency;
/// loose ones count only where no tight one is there. Two that fit cannot be told apart at this resolution and are
/// called ambiguous. Strong: one tight fit; fair: one loose fit, or no fit and a natural frequency there (within half
/// its half-power bandwidth and 2 u); weak: ambiguous or nothing. resolution_hz: spacing of the spectrum's lines, > 0.
Cause cause_of_peak(const base::Estimate& frequency, double resolution_hz, std::span<const Forcing> forcing,
                    std::span<const modal::Mode> modes = {});

}  // namespace stillmass::machine
