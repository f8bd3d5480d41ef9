#pragma once

#include <complex>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/numeric/matrix.hpp"

namespace stillmass::spectral {

/// Fourier lines of a stretch of complex samples within a band: z_k = mean of z(t) exp(-2 pi i k t / n), t counted from
/// the middle of the stretch. A steady tone of complex amplitude A (at the middle) that stands x lines from 0 gives
/// A sin(pi d) / (n sin(pi d / n)) with d = x - k on line k.
struct CloseLines {
  std::size_t samples = 0;  ///< n
  std::int64_t first = 0;   ///< number of the first line, 0 at the centre of the band
  std::vector<std::complex<double>> z;

  double number(std::size_t i) const { return static_cast<double>(first + static_cast<std::int64_t>(i)); }
};

/// The lines from -half_width to +half_width lines.
CloseLines close_lines(std::span<const std::complex<double>> samples, std::int64_t lowest, std::int64_t highest);

/// Steady tones that fit the lines by least squares, together with a parabola over the lines (complex): what tones
/// outside the band leak in, smooth where their side lobes are far.
struct CloseFit {
  std::vector<double> place;                    ///< lines from the centre, ascending
  std::vector<std::complex<double>> amplitude;  ///< at the middle of the stretch
  std::vector<std::complex<double>> residual;   ///< one a line
  double residual_sum = 0.0;
  /// Variances for noise of mean square 1 on a line.
  std::vector<double> place_variance;
  std::vector<double> amplitude_variance;
  std::vector<double> phase_variance;
};

/// The best fit with no, one, ..., `most` tones. Shorter where another tone can no longer be placed.
std::vector<CloseFit> close_fits(const CloseLines& lines, std::size_t most);

}  // namespace stillmass::spectral
