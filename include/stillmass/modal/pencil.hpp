#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/modal/half_power.hpp"

namespace stillmass::modal {

/// One decaying sinusoid of a free decay: Re(amplitude exp(p t)), p = -2 pi f z + i 2 pi f sqrt(1 - z^2).
struct DecayingSinusoid {
  FrequencyAndDamping system;
  std::complex<double> amplitude;  ///< peak value and phase at the first sample, unit of the samples
};

/// The `count` decaying sinusoids of which the samples consist, by the matrix pencil: eigenvalues of the shift of the
/// signal space of a Hankel matrix with a third as many rows as samples. Ordered by frequency; fewer than `count` where
/// poles come out real or growing. For 3 * 2 count <= samples <= 2000 (the work grows with the cube), else `Error`
/// (internal). Exact on noise-free decays. Source: Hua & Sarkar, IEEE Trans. ASSP 38 (1990) 814 (from memory).
std::vector<DecayingSinusoid> matrix_pencil(std::span<const double> samples, double rate_hz, std::size_t count);

/// Least squares of the same model, started from given sinusoids.
struct DecayFit {
  std::vector<DecayingSinusoid> sinusoids;
  std::vector<double> frequency_u;  ///< Hz, standard uncertainty for white noise
  std::vector<double> damping_u;
  double residual_rms = 0.0;
};
DecayFit fit_decay(std::span<const double> samples, double rate_hz, std::span<const DecayingSinusoid> start);

}  // namespace stillmass::modal
