#pragma once

#include <complex>
#include <span>
#include <vector>

namespace stillmass::tests {

/// X[k] = sum over t of x[t] exp(-2 pi i k t / n), k = 0 ... n/2, by the definition, in long double.
std::vector<std::complex<double>> naive_dft(std::span<const double> x);

/// The one-sided density of one block of weighted samples, by the definition: |X|^2 / (rate sum w^2), doubled between 0
/// and rate/2.
std::vector<double> naive_density(std::span<const double> x, std::span<const double> weights, double rate_hz);

}  // namespace stillmass::tests
