#include "stillmass/spectral/random_error.hpp"

#include <cmath>
#include <limits>

namespace stillmass::spectral {

double density_error(double averages) { return 1.0 / std::sqrt(averages); }

double response_error(double coherence, double averages) {
  if (!(coherence > 0.0) || !(averages > 1.0)) return std::numeric_limits<double>::infinity();
  return std::sqrt((1.0 - coherence) / (2.0 * coherence * (averages - 1.0)));
}

double coherence_error(double coherence, double averages) {
  return std::sqrt(2.0 / (coherence * averages)) * (1.0 - coherence);
}

double coherence_bias(double coherence, double averages) { return (1.0 - coherence) * (1.0 - coherence) / averages; }

}  // namespace stillmass::spectral
