#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/machine/forcing.hpp"
#include "stillmass/machine/severity.hpp"
#include "stillmass/machine/verdict.hpp"
#include "stillmass/modal/mode.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/recording/time_features.hpp"
#include "stillmass/rotation/synchronous_average.hpp"
#include "stillmass/spectral/background.hpp"
#include "stillmass/spectral/blind_family.hpp"
#include "stillmass/spectral/block_choice.hpp"
#include "stillmass/spectral/close_tones.hpp"
#include "stillmass/spectral/deflection.hpp"
#include "stillmass/spectral/envelope.hpp"
#include "stillmass/spectral/level.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"
#include "stillmass/spectral/zoom.hpp"
#include "stillmass/step/part.hpp"
#include "stillmass/step/site.hpp"

namespace stillmass::step {

/// The stopped machine with its neighbours running. Channels are matched by point, else by name.
struct BackgroundRequest {
  const recording::Reader* reader = nullptr;
  Part part{};
};

/// The envelope of the acceleration, for rolling bearings.
struct EnvelopeRequest {
  std::optional<base::Interval> band_hz{};  ///< absent: the program chooses
};

struct SpectrumRequest {
  Part part;
  spectral::SpectrumOptions options;
  std::optional<base::Quantity> quantity;  ///< absent: velocity where the channel allows it, else as measured
  base::Detector detector = base::Detector::rms;
  std::optional<base::Interval> band_hz;  ///< of the overall level; absent: that of severity, cut to the spectrum
  std::optional<double> max_frequency_hz;
  std::size_t peaks = 12;
  Site site;
  std::optional<double> speed_hz;  ///< known speed during the recording
  bool runs_steadily = true;       ///< false (a hammer test, a run-up, the stopped machine): no severity, no causes
  std::vector<modal::Mode> modes;  ///< known natural frequencies: they can be causes too
  BackgroundRequest background;
  std::optional<EnvelopeRequest> envelope;  ///< absent: where the machine has bearings of known geometry
  std::optional<base::Interval> zoom_hz;    ///< a band with the finest lines that the recording allows
  std::vector<std::string> unusable;        ///< names of channels that `check` calls so: no severity is given there
  std::string reference;                    ///< point or channel of the operating deflection; empty: chosen
  std::optional<rotation::SynchronousSettings> synchronous;  ///< average over turns of the tacho too
};

/// The severity of one channel.
struct Severity {
  machine::SeverityLimits limits;
  machine::SeverityVerdict verdict;
  double velocity = 0.0;  ///< m/s r.m.s. in the standard's band
};

struct SpectralPeak {
  spectral::Tone tone;  ///< amplitude r.m.s., SI unit of the quantity
  machine::Cause cause;
  std::optional<spectral::BackgroundTone> background;         ///< its partner with the machine stopped
  spectral::Closeness closeness = spectral::Closeness::none;  ///< what a finer look found; `none`: none was needed
  std::optional<double> variation;                            ///< r.m.s. of its amplitude, of a tone that is unsteady
  std::optional<double> wander_hz;                            ///< r.m.s., of a frequency that wanders
  double resolution_hz = 0.0;                                 ///< tones closer than this are one here
  std::string note;                                           ///< of that look, in words; may be empty

  /// The larger half of it is there with the machine stopped (common practice): the background's, not the machine's.
  bool in_background() const { return background && background->share.value >= 0.5; }
};

/// A line of the envelope with its cause.
struct EnvelopePeak {
  spectral::Tone tone;
  base::Estimate depth;  ///< modulation depth
  machine::Cause cause;
};

struct EnvelopeResult {
  base::Answer<spectral::Envelope> envelope = base::Refusal{};
  std::vector<EnvelopePeak> peaks;  ///< strongest first
};

struct ChannelSpectrum {
  recording::Channel channel;
  recording::ChannelFeatures features;  ///< of the time signal as measured
  spectral::Spectrum measured;
  spectral::Spectrum shown;                             ///< in the quantity asked for
  std::optional<double> low_limit_hz;                   ///< of an integration: nothing is given below
  base::Interval band_hz;                               ///< of the overall level: the part that the spectrum holds
  std::optional<base::Estimate> overall;                ///< r.m.s., SI; absent where the band cannot be given
  std::optional<base::Estimate> severity_velocity;      ///< r.m.s. velocity in the standard's band
  spectral::ThirdOctaves third_octaves;                 ///< of the quantity asked for
  std::vector<SpectralPeak> peaks;                      ///< strongest first, so many as asked for
  std::vector<SpectralPeak> velocity_peaks;             ///< all that were found, as velocity: for the causes
  std::optional<spectral::BackgroundLevel> background;  ///< of the velocity, in the standard's band
  std::vector<double> background_density;               ///< of the quantity asked for, where the lines are the same
  base::Answer<Severity> severity = base::Refusal{};
  std::optional<machine::RangeVerdict> typical;  ///< against the typical ranges of ISO 20816-1
  std::optional<machine::PlantVerdict> plant;    ///< against the plant's own limits
  std::optional<spectral::ZoomSpectrum> zoom;    ///< of the quantity asked for
  std::optional<EnvelopeResult> envelope;
  std::optional<rotation::SynchronousAverage> synchronous;
  std::vector<base::Finding> findings;
};

/// How the machine moves at one forcing frequency.
struct OperatingDeflection {
  std::string name;  ///< of the forcing, or the frequency
  std::optional<double> order;
  spectral::DeflectionShape shape;
};

struct SpectrumResult {
  recording::Recording recording;
  recording::FrameRange range;
  base::Detector detector = base::Detector::rms;
  spectral::SpectrumOptions options;
  spectral::BlockChoice choice;
  std::optional<double> max_frequency_hz;
  std::optional<base::Estimate> speed;                 ///< running speed, turns per second
  std::optional<machine::RunningSpeed> refined_speed;  ///< from the spectrum, with the lines that support it
  std::vector<machine::Forcing> forcing;
  std::vector<ChannelSpectrum> channels;                 ///< vibration and force channels; tachos are left out
  std::vector<spectral::Tone> tones;                     ///< of all vibration channels together, ascending
  spectral::Families families;                           ///< among those, found without the speed
  std::vector<OperatingDeflection> shapes;               ///< none with a single channel of motion
  std::optional<std::size_t> worst;                      ///< of the channels with a severity: the worst
  std::optional<machine::TypicalRanges> typical_ranges;  ///< where a channel was held against them
  std::vector<base::Finding> causes;                     ///< what drives the vibration, strongest first
  std::vector<base::Refusal> refusals;                   ///< what was asked for and the recording does not give
  std::vector<base::Finding> findings;
};

/// Averaged spectra, levels, peaks with their causes, severity, and what drives the machine. Throws what the reader
/// throws, `Stopped`, and `Error` (usage) for a resolution, a band or a part that the recording cannot give.
SpectrumResult spectrum(const recording::Reader& reader, const SpectrumRequest& request, const base::Context& context);

}  // namespace stillmass::step
