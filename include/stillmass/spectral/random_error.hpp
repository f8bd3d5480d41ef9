#pragma once

namespace stillmass::spectral {

/// Random errors of averaged spectra of Gaussian signals from `averages` independent blocks (effective averages where
/// blocks overlap). Source: Bendat & Piersol, Random Data, ch. 9 (from memory; confirmed by simulation in the tests).

/// Relative standard error of an auto-spectral density: 1 / sqrt(n).
double density_error(double averages);

/// Relative standard error of |H|, and the standard error of its phase in rad:
/// sqrt((1 - g2) / (2 g2 (n - 1))), g2 the coherence. The book has n for n - 1: one complex number is fitted to n
/// blocks, which is nothing at n = 100 and 22 % at n = 3. Infinite where g2 is 0 or n is at most 1.
double response_error(double coherence, double averages);

/// Relative standard error of the coherence g2: sqrt(2) (1 - g2) / sqrt(g2 n).
double coherence_error(double coherence, double averages);

/// By how much the coherence is found too high on average: (1 - g2)^2 / n.
double coherence_bias(double coherence, double averages);

}  // namespace stillmass::spectral
