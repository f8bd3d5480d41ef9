#pragma once

#include <cstddef>

#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// The spectrum as it was measured, before any integration line by line.
Spectrum as_measured(const Spectrum& spectrum);

/// How many lines on each side the noise floor is taken from.
std::size_t floor_lines(Window window);

/// Median over mean of a density averaged that many times: Wilson & Hilferty 1931.
double median_over_mean(double averages);

}  // namespace stillmass::spectral
