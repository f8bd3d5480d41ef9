#pragma once

#include <cstddef>
#include <span>
#include <vector>

#include "spectral/band_filter.hpp"

namespace stillmass::spectral {

/// Running median of summed powers over nine lines: tones do not count, the slope of the noise does.
std::vector<double> smoothed(std::span<const double> power);

/// How many samples of the complex envelope of Gaussian noise with these densities on the filter's lines are worth one
/// independent one for its kurtosis: sum over all lags of |rho|^4, rho the correlation of the samples; at least 1.
double samples_alike(std::span<const double> density, const BandFilter& filter);

/// What the lower median of the kurtosis over `stretches` stretches of complex Gaussian noise, each of `independent`
/// samples, exceeds with this chance. One stretch has zero mean, variance 4 / n and skewness 10 / sqrt n (from the
/// moments of |x|^4 - 4 |x|^2 + 2, twice the second Laguerre polynomial, |x|^2 exponential); its tail is taken as that
/// of a chi-square with this skewness. More than half of the stretches must exceed the limit.
double kurtosis_limit(double independent, std::size_t stretches, double chance);

}  // namespace stillmass::spectral
