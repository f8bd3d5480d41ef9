#pragma once

#include <vector>

#include "stillmass/step/spectrum.hpp"

namespace stillmass::step {

/// The tones of one channel's spectrum, and which channel of the recording it is.
struct ChannelTones {
  std::size_t channel = 0;  ///< of the recording
  std::vector<spectral::Tone> tones;
};

/// A tone with what a finer look at it found.
struct FineTone {
  spectral::Tone tone;
  spectral::Closeness closeness = spectral::Closeness::none;
  std::string note;
  std::optional<double> wander_hz{};
  std::optional<double> variation{};
  double resolution_hz = 0.0;  ///< tones closer than this are one
};

/// Looks at suspect tones (`spectral::suspect`) with the whole length of the recording, all in one pass, and puts the
/// tones that a peak is made of in its place. `spectra`: those of the tones, of the quantity of the tones.
std::vector<std::vector<FineTone>> fine_tones(const recording::Reader& reader, recording::FrameRange range,
                                              const std::vector<ChannelTones>& all,
                                              const std::vector<const spectral::Spectrum*>& spectra,
                                              const base::Context& context);

/// Steady tones in a band of each of those channels (of the recording), found with its whole length; in the quantity of
/// the channel.
std::vector<std::vector<spectral::CloseTone>> tones_within(const recording::Reader& reader, recording::FrameRange range,
                                                           const std::vector<std::size_t>& channels,
                                                           base::Interval band_hz, const base::Context& context);

}  // namespace stillmass::step
