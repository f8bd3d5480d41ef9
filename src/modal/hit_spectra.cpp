#include "modal/hit_spectra.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>
#include <numbers>
#include <numeric>

#include "stillmass/spectral/block_transform.hpp"

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;

constexpr double dead = 0.01;  // of its own start: no window needed
constexpr double remainder_left = 0.003;
constexpr double usable_share = 1.0 / 2.56;
constexpr std::size_t smoothing_lines = 6;  // independent ones, to either side

double mean_square(std::span<const double> x) {
  return std::inner_product(x.begin(), x.end(), x.begin(), 0.0) / static_cast<double>(x.size());
}

/// The largest length up to n with no prime factor above 5: quick to transform.
std::size_t quick_length(std::size_t n) {
  for (; n > 1; --n) {
    std::size_t rest = n;
    for (const std::size_t factor : {2U, 3U, 5U}) {
      while (rest % factor == 0) rest /= factor;
    }
    if (rest == 1) break;
  }
  return n;
}

/// What is left of the slowest part of a response at the end of the block, relative to its own start. The block is cut
/// into eighths. The last eighth may be noise: the rate of decay is read where the level stands well above it.
double left_at_end(std::span<const double> decay) {
  constexpr std::size_t parts = 8;
  constexpr double well_above = 3.0;
  constexpr double falling = 1.5;
  const std::size_t part = decay.size() / parts;
  if (part < 4) return 1.0;
  std::array<double, parts> square{};
  for (std::size_t i = 0; i < parts; ++i) square[i] = mean_square(decay.subspan(i * part, part));
  const double last = square.back();
  std::size_t k = parts - 1;
  while (k > 0 && square[k] <= well_above * well_above * last) --k;
  if (k > 0) {
    const double fall = (square[k] - last) / std::max(square[k - 1] - last, 1e-300);
    return std::min(1.0, std::pow(fall, 0.5 * parts));
  }
  // After the first eighth there is either noise only or something slow.
  return square[1] > falling * falling * last ? std::sqrt(last / square[1]) : 0.0;
}

/// To accelerations by s^power.
int power_to_acceleration(base::Quantity quantity) {
  if (quantity == base::Quantity::velocity) return 1;
  return quantity == base::Quantity::displacement ? 2 : 0;
}

double smoothed(std::span<const double> sums, std::size_t line, std::size_t reach) {
  const std::size_t first = line > reach ? line - reach : 0;
  const std::size_t last = std::min(line + reach, sums.size() - 2);
  return (sums[last + 1] - sums[first]) / static_cast<double>(last + 1 - first);
}

}  // namespace

BlockWindow choose_window(std::span<const HitBlocks> hits) {
  std::size_t frames = std::numeric_limits<std::size_t>::max();
  for (const HitBlocks& hit : hits) frames = std::min(frames, hit.responses.front().size());
  BlockWindow window{quick_length(frames), 0.0};

  double left = 0.0;
  for (std::size_t p = 0; p < hits.front().responses.size(); ++p) {
    for (const HitBlocks& hit : hits) {
      const auto decay = std::span(hit.responses[p]).first(window.frames).subspan(hit.contact_end);
      left = std::max(left, left_at_end(decay));
    }
  }
  const double length_s = static_cast<double>(window.frames) / hits.front().rate_hz;
  if (left > dead) window.decay_per_s = std::log(left / remainder_left) / length_s;
  return window;
}

std::complex<double> HitSpectra::s(std::size_t line) const {
  return {decay_per_s, 2.0 * std::numbers::pi * line_hz * static_cast<double>(line)};
}

HitSpectra hit_spectra(std::span<const HitBlocks> hits, const BlockWindow& window,
                       std::span<const ResponseName> responses, const base::Context& context) {
  const double rate = hits.front().rate_hz;
  const std::size_t padded = HitSpectra::padding * window.frames;
  HitSpectra spectra;
  spectra.resolution_hz = rate / static_cast<double>(window.frames);
  spectra.line_hz = rate / static_cast<double>(padded);
  spectra.decay_per_s = window.decay_per_s;
  spectra.responses.resize(hits.front().responses.size());

  std::vector<double> weights(padded, 0.0);
  double weight_square = 0.0;
  for (std::size_t i = 0; i < window.frames; ++i) {
    weights[i] = std::exp(-window.decay_per_s * static_cast<double>(i) / rate);
    weight_square += weights[i] * weights[i];
  }
  spectral::BlockTransform transform(std::move(weights));
  const auto lines = static_cast<std::size_t>(usable_share * static_cast<double>(padded)) + 1;
  std::vector<double> block(padded, 0.0);
  const auto transformed = [&](std::span<const double> samples, int power) {
    std::copy_n(samples.begin(), window.frames, block.begin());
    const auto values = transform(block);
    std::vector<Complex> result(lines);
    for (std::size_t k = 0; k < lines; ++k) {
      result[k] = values[k] / rate;
      for (int i = 0; i < power; ++i) result[k] *= spectra.s(k);
    }
    return result;
  };

  for (std::size_t h = 0; h < hits.size(); ++h) {
    context.check_stop();
    context.report("transforming blows", static_cast<double>(h) / static_cast<double>(hits.size()));
    spectra.force.push_back(transformed(hits[h].force, 0));
    for (std::size_t p = 0; p < spectra.responses.size(); ++p) {
      const base::Quantity quantity = p < responses.size() ? responses[p].quantity : base::Quantity::acceleration;
      spectra.responses[p].push_back(transformed(hits[h].responses[p], power_to_acceleration(quantity)));
    }
  }
  for (std::size_t p = 0; p < spectra.responses.size(); ++p) {
    double quiet = 0.0;
    for (const HitBlocks& hit : hits) quiet += mean_square(std::span(hit.responses[p]).first(hit.onset));
    spectra.quiet.push_back(quiet / static_cast<double>(hits.size()) * weight_square / (rate * rate));
  }
  return spectra;
}

std::vector<Complex> accelerance_without(const HitSpectra& spectra, std::size_t response,
                                         std::optional<std::size_t> hit) {
  std::vector<Complex> accelerance(spectra.lines());
  for (std::size_t k = 0; k < accelerance.size(); ++k) {
    Complex cross = 0.0;
    double power = 0.0;
    for (std::size_t h = 0; h < spectra.hits(); ++h) {
      if (hit == h) continue;
      cross += std::conj(spectra.force[h][k]) * spectra.responses[response][h][k];
      power += std::norm(spectra.force[h][k]);
    }
    accelerance[k] = power > 0.0 ? cross / power : 0.0;
  }
  return accelerance;
}

Average average(const HitSpectra& spectra, std::size_t response) {
  Average result;
  result.accelerance = accelerance_without(spectra, response, {});
  const std::size_t lines = spectra.lines();
  const std::size_t hits = spectra.hits();
  std::vector<double> force_power(lines, 0.0);
  std::vector<double> scatter(lines, 0.0);  // mean square of what the force does not explain
  for (std::size_t k = 0; k < lines; ++k) {
    double unexplained = 0.0;
    double power = 0.0;
    for (std::size_t h = 0; h < hits; ++h) {
      const Complex x = spectra.responses[response][h][k];
      force_power[k] += std::norm(spectra.force[h][k]);
      unexplained += std::norm(x - result.accelerance[k] * spectra.force[h][k]);
      power += std::norm(x);
    }
    if (hits > 1) {
      result.coherence.push_back(power > 0.0 ? std::clamp(1.0 - unexplained / power, 0.0, 1.0) : 0.0);
      scatter[k] = unexplained / static_cast<double>(hits - 1);
    } else {
      scatter[k] = spectra.quiet[response];
    }
  }

  std::vector<double> sums(lines + 1, 0.0);
  std::partial_sum(scatter.begin(), scatter.end(), sums.begin() + 1);
  result.u.resize(lines);
  for (std::size_t k = 0; k < lines; ++k) {
    const double variance = smoothed(sums, k, smoothing_lines * HitSpectra::padding);
    result.u[k] = force_power[k] > 0.0 ? std::sqrt(0.5 * variance / force_power[k]) : 0.0;
  }
  return result;
}

std::vector<double> force_magnitude(const HitSpectra& spectra) {
  std::vector<double> mean(spectra.lines(), 0.0);
  for (const auto& force : spectra.force) {
    for (std::size_t k = 0; k < mean.size(); ++k) mean[k] += std::abs(force[k]) / static_cast<double>(spectra.hits());
  }
  return mean;
}

}  // namespace stillmass::modal
