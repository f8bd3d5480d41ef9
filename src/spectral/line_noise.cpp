#include "spectral/line_noise.hpp"

#include <cmath>
#include <map>
#include <numbers>

namespace stillmass::spectral {

namespace {

constexpr std::size_t steps = 256;  // of a window here, and of the lags: errors below 1e-3 of the covariance

}  // namespace

LineNoise::LineNoise(const Spectrum& spectrum) {
  const auto blocks = static_cast<double>(spectrum.blocks);
  std::map<std::size_t, double> pairs{{0, blocks}};
  for (const Overlap& overlap : spectrum.overlaps) {
    pairs[static_cast<std::size_t>(std::lround(overlap.lag * steps))] += 2.0 * overlap.pairs;
  }
  const auto w = samples(spectrum.window, steps);
  double power = 0.0;
  for (const double v : w) power += v * v;
  for (const auto& [lag, count] : pairs) {
    Term term{static_cast<double>(lag) / steps, count / (blocks * blocks), {}};
    for (std::size_t i = 0; i + lag < steps; ++i) {
      const double t = (static_cast<double>(i) + 0.5 * static_cast<double>(lag)) / steps - 0.5;
      for (std::size_t m = 0; m <= most_apart; ++m) {
        term.correlation[m] +=
            w[i] * w[i + lag] / power * std::cos(2.0 * std::numbers::pi * static_cast<double>(m) * t);
      }
    }
    terms_.push_back(term);
  }
}

double LineNoise::beside_tone(std::size_t apart, double offset) const {
  if (apart > most_apart) return 0.0;
  double sum = 0.0;
  for (const Term& term : terms_) {
    sum += term.weight * term.correlation[apart] * std::cos(2.0 * std::numbers::pi * offset * term.lag);
  }
  return sum;
}

double LineNoise::of_power(std::size_t apart) const {
  if (apart > most_apart) return 0.0;
  double sum = 0.0;
  for (const Term& term : terms_) sum += term.weight * term.correlation[apart] * term.correlation[apart];
  return sum;
}

}  // namespace stillmass::spectral
