#pragma once

#include <complex>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/description.hpp"
#include "stillmass/machine/forcing.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::machine {

/// A tone of a channel's spectrum with its cause.
struct CausedTone {
  base::Estimate frequency;    ///< Hz
  base::Estimate amplitude;    ///< r.m.s. velocity, m/s
  Cause cause;                 ///< its positions are those of Facts::forcing and Facts::modes
  bool in_background = false;  ///< it stands in a recording of the stopped machine too: not this machine's doing
};

/// A tone of the envelope of a channel with its cause.
struct EnvelopeTone {
  base::Estimate frequency;  ///< Hz
  double depth = 0.0;        ///< modulation depth: peak amplitude of the tone over the mean of the envelope
  Cause cause;
  bool in_background = false;
};

/// Tones at equal distances: harmonics of a fundamental, or side bands of a carrier.
struct ToneFamily {
  base::Estimate spacing;                 ///< Hz: the fundamental, or the distance of the side bands
  std::optional<base::Estimate> carrier;  ///< Hz, of side bands; absent: harmonics
  std::vector<int> numbers;               ///< those seen: k of k spacing, or of carrier + k spacing
};

/// A test that settles a question, such as cutting the power or loosening one foot bolt.
enum class TestOutcome { not_made, confirmed, refuted };

/// What a run-up or coast-down told of a channel.
struct SpeedRun {
  std::optional<base::Estimate> exponent;  ///< p where the 1x displacement grows as speed^p, away from resonances: 2
                                           ///< for unbalance, about 0 for a force that does not follow the speed
  std::optional<double> slow_roll;         ///< 1x displacement while turning slowly over that at running speed
  std::optional<double> phase_change;      ///< of 1x over the run, rad; about pi where a natural frequency was passed
};

/// What has been measured at one channel. Absent or empty: not known, and the findings say so.
struct ChannelFacts {
  std::string name;
  std::string place;      ///< bearing or foot at which channels of several directions stand ("pump-de"); empty: the
                          ///< channel stands alone. `placed` reads it from the name of a point
  std::string rotor;      ///< machine part with a shaft of its own ("motor", "pump"); empty: not known
  std::string direction;  ///< "horizontal", "vertical", "axial", or a signed axis ("+x", "-z")
  bool on_bearing_housing = false;    ///< a channel that is not there, and names no bearing, tells nothing of bearings
  std::vector<std::string> bearings;  ///< names of the machine's bearings it stands at; empty: any of them

  std::optional<base::Estimate> velocity;    ///< broad-band level as severity is judged, m/s r.m.s.
  std::optional<double> smooth_limit;        ///< the limit below which the machine is as good as new (zone A/B), m/s
  std::vector<CausedTone> tones;             ///< any order
  double line_hz = 0.0;                      ///< spacing of the spectrum's lines, Hz; 0: not known
  std::vector<ToneFamily> families;          ///< those of side bands count; harmonics are counted from the tones
  std::optional<double> noise_velocity;      ///< r.m.s. velocity of what is left of the level without its tones, m/s
  std::optional<double> acceleration;        ///< r.m.s. acceleration over all that was measured, m/s2
  std::optional<double> noise_acceleration;  ///< r.m.s. acceleration above 1 kHz without its tones, m/s2
  std::optional<double> crest_factor;        ///< of the acceleration: peak over r.m.s.
  std::optional<double> kurtosis;            ///< of the acceleration; 3 for Gaussian noise, 1.5 for a sine

  std::optional<std::vector<EnvelopeTone>> envelope;  ///< absent: no envelope was computed
  std::optional<base::Interval> envelope_band_hz;     ///< of the carrier

  std::optional<SpeedRun> run;
  TestOutcome power_cut = TestOutcome::not_made;  ///< confirmed: the electrical line vanished at once with the supply
                                                  ///< while the speed had hardly changed; refuted: it stayed
};

/// How one channel moves against another, or against the tacho, at one order. The best reference is the channel that
/// moves most at that order: against one that hardly moves the coherence is too low to count.
struct PhaseFact {
  std::string channel;
  std::string reference;            ///< name of the other channel; empty: the tacho
  double order = 1.0;               ///< frequency over running speed
  std::complex<double> ratio;       ///< channel over reference, both of one quantity, e^{+i omega t}
  std::optional<double> phase_u;    ///< standard uncertainty of its angle, rad
  std::optional<double> coherence;  ///< absent: not known (tacho, single block)
};

/// What has been measured of the running machine.
struct Facts {
  Machine machine;
  std::optional<base::Estimate> speed;  ///< turns per second
  std::vector<Forcing> forcing;         ///< the list that the causes refer to
  std::vector<ChannelFacts> channels;
  std::vector<PhaseFact> phases;                  ///< any pairs: what two share a reference with is known of the two
  std::vector<modal::Mode> modes;                 ///< empty: none was looked for
  std::optional<char> shaft_axis;                 ///< 'x', 'y' or 'z': along the shaft, for channels with a signed axis
  char vertical_axis = 'z';                       ///< for channels with a signed axis
  TestOutcome soft_foot = TestOutcome::not_made;  ///< confirmed: the level changed when a foot bolt was loosened
};

/// Place and rotor as the name of a point says them: words joined by '-', '_', '.' or blanks, of which "de", "nde",
/// "drive", "free", "ib", "ob" or a number tell the end, a last "h", "v", "a" (or the whole word) the direction, and
/// what stands before them the rotor. "pump-de-h": place "pump-de", rotor "pump". A name without such words is its own
/// place and says no rotor.
struct Placed {
  std::string place;
  std::string rotor;
  std::string direction;  ///< "horizontal", "vertical", "axial"; empty: the name does not say
};
Placed placed(std::string_view point);

}  // namespace stillmass::machine
