#pragma once

#include "stillmass/step/spectrum.hpp"

// The running speed from the spectra: a part of step/spectrum.
namespace stillmass::step {

/// Tones of all vibration channels together, and the families among them.
void find_families(SpectrumResult& result);

/// The running speed: refined from the lines of all channels, else as stated. Where no line stands where it must be, a
/// finer look is taken there, and what it finds joins the peaks. A speed that varies is a finding.
void find_speed(SpectrumResult& result, const recording::Reader& reader, const machine::Machine& machine,
                const SpectrumRequest& request, const base::Context& context);

}  // namespace stillmass::step
