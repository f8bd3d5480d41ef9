#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/machine/forcing.hpp"
#include "stillmass/machine/severity.hpp"
#include "stillmass/modal/mode.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"
#include "stillmass/step/part.hpp"
#include "stillmass/step/site.hpp"

namespace stillmass::step {

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
  std::vector<modal::Mode> modes;  ///< known natural frequencies: they can be causes too
};

/// The severity of one channel.
struct Severity {
  machine::SeverityLimits limits;
  machine::Zone zone = machine::Zone::a;
  double velocity = 0.0;  ///< m/s r.m.s. in the standard's band
};

struct SpectralPeak {
  spectral::Tone tone;  ///< amplitude r.m.s., SI unit of the quantity
  machine::Cause cause;
};

struct ChannelSpectrum {
  recording::Channel channel;
  spectral::Spectrum measured;
  spectral::Spectrum shown;                         ///< in the quantity asked for
  base::Interval band_hz;                           ///< of the overall level: the part that the spectrum holds
  std::optional<base::Estimate> overall;            ///< r.m.s., SI; absent where the band cannot be given
  std::optional<base::Estimate> severity_velocity;  ///< r.m.s. velocity in the standard's band
  std::vector<SpectralPeak> peaks;                  ///< strongest first
  base::Answer<Severity> severity = base::Refusal{};
  std::vector<base::Finding> findings;
};

struct SpectrumResult {
  recording::Recording recording;
  recording::FrameRange range;
  base::Detector detector = base::Detector::rms;
  spectral::SpectrumOptions options;
  std::optional<double> max_frequency_hz;
  std::optional<base::Estimate> speed;  ///< running speed, turns per second
  std::vector<machine::Forcing> forcing;
  std::vector<ChannelSpectrum> channels;  ///< vibration and force channels; tachos are left out
  std::vector<base::Finding> findings;
};

/// Averaged spectra, levels, peaks with their causes, severity. Throws what the reader throws, `Stopped`, and `Error`
/// (usage) for a resolution or a part that the recording cannot give.
SpectrumResult spectrum(const recording::Reader& reader, const SpectrumRequest& request, const base::Context& context);

}  // namespace stillmass::step
