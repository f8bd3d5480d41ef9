#pragma once

#include "stillmass/step/spectrum.hpp"

// The peaks of a spectrum and their causes: parts of step/spectrum.
namespace stillmass::step {

/// Where the channel stands in the recording.
std::size_t position_of(const SpectrumResult& result, const ChannelSpectrum& channel);

/// The peaks of every channel, with a finer look at those that may be several.
void find_peaks(SpectrumResult& result, const recording::Reader& reader, const SpectrumRequest& request,
                const base::Context& context);

/// A steady tone of the channel as measured, found apart from its spectrum, joins the peaks. `note`: how it was found.
void add_peak(ChannelSpectrum& channel, const spectral::CloseTone& tone, const std::string& note);

/// Why each peak is there; `result.forcing` and the background's marks are there already.
void find_causes(SpectrumResult& result, const SpectrumRequest& request);

}  // namespace stillmass::step
