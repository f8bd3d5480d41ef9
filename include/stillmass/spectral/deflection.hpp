#pragma once

#include <complex>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/estimate.hpp"
#include "stillmass/spectral/cross_spectrum.hpp"

namespace stillmass::spectral {

/// How a channel moves against the reference at one frequency.
struct Deflection {
  std::string channel;
  std::complex<double> ratio;       ///< output over reference, e^{+i omega t}, SI unit over SI unit
  base::Estimate magnitude;         ///< |ratio|
  base::Estimate phase;             ///< rad, -pi to pi, positive where the channel leads the reference
  std::optional<double> coherence;  ///< absent for a single block
};

/// Ratios at a frequency from the lines under the window's main lobe there: sum Gxy / sum Gxx. u as for a frequency
/// response; absent for a single block. Channels without a block are left out. Throws `Error` (usage): a frequency that
/// is not between the first line and rate/2.
std::vector<Deflection> deflections(std::span<const CrossSpectrum> spectra, double frequency_hz);

}  // namespace stillmass::spectral
