#include "stillmass/modal/ring_down_test.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/modal/decrement.hpp"
#include "stillmass/modal/headline.hpp"
#include "stillmass/modal/peaks.hpp"
#include "stillmass/modal/pencil.hpp"
#include "stillmass/numeric/fir.hpp"
#include "stillmass/numeric/statistics.hpp"
#include "stillmass/spectral/block_transform.hpp"

namespace stillmass::modal {
namespace {

constexpr std::size_t padding = 4;
constexpr double samples_per_highest_cycle = 4.0;
constexpr double tail_share = 0.1;
constexpr double largest_damping = 0.3;

/// The decays of one response, all of one length.
struct Decays {
  double rate_hz = 0.0;
  std::vector<std::vector<double>> samples;
};

double mean_square(std::span<const double> x) {
  return std::inner_product(x.begin(), x.end(), x.begin(), 0.0) / static_cast<double>(x.size());
}

std::size_t response_to_read(std::span<const HitBlocks> blocks, const RingDownOptions& options) {
  for (std::size_t p = 0; p < options.responses.size() && !options.point.empty(); ++p) {
    if (options.responses[p].point == options.point || options.responses[p].channel == options.point) return p;
  }
  if (!options.point.empty())
    throw base::usage_error("--driving-point", "no response is named '" + options.point + "'");
  std::size_t most = 0;
  double most_motion = -1.0;
  for (std::size_t p = 0; p < blocks.front().responses.size(); ++p) {
    double motion = 0.0;
    for (const HitBlocks& block : blocks) motion += mean_square(block.responses[p]);
    if (motion > most_motion) most = p;
    most_motion = std::max(motion, most_motion);
  }
  return most;
}

/// What comes after contact, at no more samples than the highest frequency asks for.
Decays decays_of(std::span<const HitBlocks> blocks, std::size_t response, double max_frequency_hz) {
  Decays decays;
  decays.rate_hz = blocks.front().rate_hz;
  std::size_t factor = 1;
  while (decays.rate_hz / static_cast<double>(2 * factor) >= samples_per_highest_cycle * max_frequency_hz) factor *= 2;
  std::size_t length = std::numeric_limits<std::size_t>::max();
  for (const HitBlocks& block : blocks) {
    if (block.rate_hz != decays.rate_hz || response >= block.responses.size() ||
        block.responses[response].size() <= block.contact_end) {
      throw base::Error(base::ErrorKind::internal, "modal/ring_down_test", "the blocks do not fit together");
    }
    const auto decay = std::span(block.responses[response]).subspan(block.contact_end);
    std::vector<double> samples(decay.begin(), decay.end());
    if (factor > 1) {
      // The decimator sees the decay begin abruptly; what its filter makes of that is left out.
      const auto disturbed = static_cast<std::ptrdiff_t>(numeric::PyramidDecimator(factor).half_length() / factor + 1);
      samples = numeric::decimated(samples, factor);
      const std::ptrdiff_t out = std::min(disturbed, std::ssize(samples) / 2);
      samples.erase(samples.begin(), samples.begin() + out);
      samples.resize(samples.size() - static_cast<std::size_t>(std::min(disturbed, std::ssize(samples) / 2)));
    }
    length = std::min(length, samples.size());
    decays.samples.push_back(std::move(samples));
  }
  decays.rate_hz /= static_cast<double>(factor);
  for (auto& samples : decays.samples) samples.resize(length);
  return decays;
}

/// Root mean square over decays of their spectra, under half a Hann window so that the cut at the end leaves no trace.
PeakLines mean_spectrum(const Decays& decays) {
  const std::size_t length = decays.samples.front().size();
  std::vector<double> weights(padding * length, 0.0);
  double weight_square = 0.0;
  for (std::size_t i = 0; i < length; ++i) {
    const double c = std::cos(0.5 * std::numbers::pi * static_cast<double>(i) / static_cast<double>(length));
    weights[i] = c * c;
    weight_square += weights[i] * weights[i];
  }
  spectral::BlockTransform transform(std::move(weights));
  std::vector<double> block(padding * length, 0.0);
  std::vector<double> power(transform.lines(), 0.0);
  double tail = 0.0;
  const double share = 1.0 / static_cast<double>(decays.samples.size());
  for (const std::vector<double>& samples : decays.samples) {
    std::ranges::copy(samples, block.begin());
    const auto values = transform(block);
    for (std::size_t k = 0; k < power.size(); ++k) power[k] += share * std::norm(values[k]);
    const auto last = static_cast<std::size_t>(tail_share * static_cast<double>(length)) + 1;
    tail += share * mean_square(std::span(samples).last(last));
  }
  PeakLines lines;
  lines.line_hz = decays.rate_hz / static_cast<double>(padding * length);
  const double u = std::sqrt(0.5 * share * tail * weight_square) / decays.rate_hz;
  for (const double p : power) lines.indicator.push_back(std::sqrt(p) / decays.rate_hz);
  lines.u.assign(power.size(), u);
  return lines;
}

bool supported(const DecayFit& fit, std::size_t r, base::Interval band_hz) {
  const FrequencyAndDamping& system = fit.sinusoids[r].system;
  return band_hz.contains(system.frequency_hz) && system.damping_ratio > 1e-5 &&
         system.damping_ratio < largest_damping && fit.damping_u[r] < 0.5 * system.damping_ratio;
}

/// Fits every decay with the same modes; a mode that any decay does not support is left out and all are fitted again.
std::vector<DecayFit> fit_all(const Decays& decays, std::vector<DecayingSinusoid> start, base::Interval band_hz,
                              const base::Context& context) {
  while (!start.empty()) {
    std::vector<DecayFit> fits;
    for (const std::vector<double>& samples : decays.samples) {
      context.check_stop();
      fits.push_back(fit_decay(samples, decays.rate_hz, start));
    }
    std::vector<DecayingSinusoid> kept;
    for (std::size_t r = 0; r < start.size(); ++r) {
      if (std::ranges::all_of(fits, [&](const DecayFit& fit) { return supported(fit, r, band_hz); })) {
        kept.push_back(fits.front().sinusoids[r]);
      }
    }
    if (kept.size() == start.size()) return fits;
    start = std::move(kept);
  }
  return {};
}

base::Estimate over_decays(std::span<const double> values, base::Quantity quantity) {
  numeric::RunningMoments moments;
  moments.add(values);
  base::Estimate estimate{moments.mean(), {}, {}, quantity};
  if (const auto deviation = moments.standard_deviation()) {
    estimate.u = *deviation / std::sqrt(static_cast<double>(values.size()));
    estimate.dof = static_cast<double>(values.size()) - 1.0;
  }
  return estimate;
}

/// The decrement of each decay in the band that belongs to the mode alone; nothing where one of them is too short.
std::optional<MethodResult> by_decrement(const Decays& decays, base::Interval own_hz) {
  std::vector<double> frequencies;
  std::vector<double> dampings;
  for (const std::vector<double>& samples : decays.samples) {
    const auto decay = ring_down(samples, decays.rate_hz, own_hz);
    if (!decay) return std::nullopt;
    frequencies.push_back(decay->frequency.value);
    dampings.push_back(decay->damping_ratio.value);
  }
  return MethodResult{"logarithmic decrement", over_decays(frequencies, base::Quantity::frequency),
                      over_decays(dampings, base::Quantity::ratio)};
}

base::Interval own_band(std::span<const Mode> modes, std::size_t r, double rate_hz) {
  const double f = modes[r].frequency.value;
  double reach = std::min(0.3 * f, 0.49 * rate_hz - f);
  if (r > 0) reach = std::min(reach, f - modes[r - 1].frequency.value);
  if (r + 1 < modes.size()) reach = std::min(reach, modes[r + 1].frequency.value - f);
  return {f - reach, f + reach};
}

}  // namespace

base::Answer<RingDownTest> ring_down_test(std::span<const HitBlocks> blocks, const RingDownOptions& options,
                                          const base::Context& context) {
  if (blocks.empty()) {
    return base::Refusal{"no-usable-hit", "no ring-down could be used",
                         "strike again, five single blows, each after the vibration of the last has died away"};
  }
  RingDownTest test;
  test.response = response_to_read(blocks, options);
  const double highest =
      options.band_hz ? options.band_hz->hi : options.max_frequency_hz.value_or(0.25 * blocks.front().rate_hz);
  const Decays decays = decays_of(blocks, test.response, highest);
  if (decays.samples.front().size() < 64) {
    return base::Refusal{"short-decay",
                         "the ring-downs are only " + std::to_string(decays.samples.front().size()) + " samples long",
                         "let the vibration die away before the next blow"};
  }
  const PeakLines lines = mean_spectrum(decays);
  test.line_hz = lines.line_hz;
  test.amplitude = lines.indicator;
  const double lowest = 4.0 * static_cast<double>(padding) * lines.line_hz;
  const base::Interval band =
      options.band_hz.value_or(base::Interval{lowest, std::min(highest, 0.45 * decays.rate_hz)});

  std::vector<DecayingSinusoid> start;
  for (const FrequencyAndDamping& peak : find_modes(lines, band)) start.push_back({peak, 0.0});
  const std::vector<DecayFit> fits = fit_all(decays, std::move(start), band, context);
  if (fits.empty()) {
    return base::Refusal{"no-mode",
                         "between " + base::rounded(band.lo) + " and " + base::rounded(band.hi) +
                             " Hz nothing in the ring-downs decays like a mode",
                         "strike harder, at a point that moves more"};
  }

  const std::size_t count = fits.front().sinusoids.size();
  for (std::size_t r = 0; r < count; ++r) {
    std::vector<double> frequencies;
    std::vector<double> dampings;
    for (const DecayFit& fit : fits) {
      frequencies.push_back(fit.sinusoids[r].system.frequency_hz);
      dampings.push_back(fit.sinusoids[r].system.damping_ratio);
    }
    Mode mode;
    mode.frequency = over_decays(frequencies, base::Quantity::frequency);
    mode.damping_ratio = over_decays(dampings, base::Quantity::ratio);
    mode.state = options.state;
    if (test.response < options.responses.size()) {
      const ResponseName& name = options.responses[test.response];
      mode.point = name.point.empty() ? name.channel : name.point;
    }
    mode.methods.push_back({"ring-down fit", mode.frequency, mode.damping_ratio});
    test.modes.push_back(std::move(mode));
  }
  std::ranges::sort(test.modes, {}, [](const Mode& mode) { return mode.frequency.value; });
  for (std::size_t r = 0; r < count; ++r) {
    Mode& mode = test.modes[r];
    if (auto second = by_decrement(decays, own_band(test.modes, r, decays.rate_hz)))
      mode.methods.push_back(std::move(*second));
    if (auto finding = disagreement(mode.methods)) test.findings.push_back(std::move(*finding));
  }
  return test;
}

}  // namespace stillmass::modal
