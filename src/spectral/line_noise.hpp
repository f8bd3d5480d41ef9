#pragma once

#include <array>
#include <cstddef>
#include <vector>

#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// How white noise on two lines of an averaged spectrum goes together, overlapping blocks and all.
///
/// About the middle of two blocks that start d apart, with t the time in blocks, the window products have the transform
/// psi_m(d) = integral of w(t + d/2) w(t - d/2) cos(2 pi m t). Noise that rides on a tone x lines along is correlated
/// on lines k and l by psi_(k-l)(d) / psi_0(0) cos(2 pi ((k + l)/2 - x) d) between these blocks; the power of noise
/// alone by (psi_(k-l)(d) / psi_0(0))^2. The mean over all pairs of blocks is what the averaged spectrum has.
class LineNoise {
 public:
  explicit LineNoise(const Spectrum& spectrum);

  /// Covariance of the averaged in-phase noise on lines k and l next to a tone, over the variance on one line of one
  /// block. `offset`: (k + l)/2 - x in lines; `apart`: |k - l|; 0 beyond 10.
  double beside_tone(std::size_t apart, double offset) const;
  /// Covariance of the averaged noise power on two lines, over the variance on one line of one block.
  double of_power(std::size_t apart) const;

 private:
  static constexpr std::size_t most_apart = 10;  // the lobe of the widest window, from end to end
  struct Term {
    double lag = 0.0;
    double weight = 0.0;                             ///< share of these pairs among all
    std::array<double, most_apart + 1> correlation;  ///< psi_m / psi_0(0)
  };
  std::vector<Term> terms_;
};

}  // namespace stillmass::spectral
