#pragma once

#include <complex>
#include <optional>

#include "stillmass/base/unit.hpp"
#include "stillmass/spectral/frequency_response.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// Integrations from one of acceleration, velocity, displacement to another: 1 from acceleration to velocity, -1 back;
/// nothing for any other pair that differs, 0 for the same quantity.
std::optional<int> integrations_between(base::Quantity from, base::Quantity to);

/// Factor on a complex amplitude at frequency f > 0 for that many integrations: (i 2 pi f)^-n.
std::complex<double> integration_factor(int integrations, double frequency_hz);

/// The lowest frequency to which a spectrum can be integrated at all: the first line that the window keeps free of what
/// leaks from 0 Hz (offset and drift of the sensor).
double least_low_limit_hz(const Spectrum& spectrum);

/// The spectrum as another quantity, line by line: density times (2 pi f)^-2n. Integrated lines below `low_limit_hz`
/// (and below `least_low_limit_hz`) are not given: first_line says where it starts. Lobes that stand out are noted in
/// `strong_lines`, so that levels (level.hpp) can count their power at their own frequency. Throws `Error` (usage) for
/// a pair that is not of acceleration, velocity, displacement.
Spectrum as_quantity(const Spectrum& spectrum, base::Quantity to, double low_limit_hz = 0.0);

/// The frequency response with its output as another quantity (accelerance, mobility, receptance). Line 0 is 0 where it
/// would be divided by 0. Throws `Error` (usage) as above.
FrequencyResponse as_quantity(const FrequencyResponse& response, base::Quantity output);

}  // namespace stillmass::spectral
