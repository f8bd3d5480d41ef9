#pragma once

#include "stillmass/step/spectrum.hpp"

// What takes a pass of its own over the recording: parts of step/spectrum.
namespace stillmass::step {

/// The background, channel by channel: its level, its tones as partners of the running ones, its density. Causes are
/// not given yet. `quantities` are those of `result.channels`.
void add_background(SpectrumResult& result, const BackgroundRequest& request, const Site& site,
                    const base::Context& context);

/// How the machine moves at the forcing frequencies (or, without any, the strongest lines) that stand in the spectra.
void add_deflections(SpectrumResult& result, const recording::Reader& reader, const std::string& reference,
                     const base::Context& context);

/// The envelopes of the accelerations with the causes of their lines.
void add_envelopes(SpectrumResult& result, const recording::Reader& reader, const EnvelopeRequest& request,
                   const base::Context& context);

/// A band with finer lines, in the quantity of each channel's spectrum.
void add_zoom(SpectrumResult& result, const recording::Reader& reader, base::Interval band_hz,
              const base::Context& context);

/// The averages over turns of the tacho.
void add_synchronous(SpectrumResult& result, const recording::Reader& reader,
                     const rotation::SynchronousSettings& settings, const base::Context& context);

}  // namespace stillmass::step
