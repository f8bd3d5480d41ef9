#include <cmath>
#include <cstdio>

#include "stillmass/absorber/closed_forms.hpp"
#include "stillmass/spectral/window.hpp"

// Den Hartog's optimum for a mass ratio of 1/4: tuning 0.8, peak 3.
int main() {
  const auto sizing = stillmass::absorber::classical(0.25, stillmass::absorber::Forcing::constant);
  const auto facts = stillmass::spectral::facts(stillmass::spectral::Window::hann);
  std::printf("tuning %.4f, height %.4f, Hann bandwidth %.4f\n", sizing.tuning, sizing.height,
              facts.noise_bandwidth_bins);
  const bool right = std::abs(sizing.tuning - 0.8) < 1e-12 && std::abs(sizing.height - 3.0) < 1e-12 &&
                     std::abs(facts.noise_bandwidth_bins - 1.5) < 1e-6;
  return right ? 0 : 1;
}
