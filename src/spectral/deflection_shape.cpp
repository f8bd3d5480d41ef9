#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <utility>

#include <fmt/format.h>

#include "stillmass/spectral/quantity.hpp"

#include "spectral/deflection_sums.hpp"
#include "spectral/line_noise.hpp"
#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

constexpr double least_prominence = 4.0;  // of the power under the peak over its noise (6 dB: common practice)
constexpr double noise_chance = 1e-3;     // that unrelated noise is taken for coherent

using Complex = std::complex<double>;

/// Reads sums of pairs as means over blocks.
class Pairs {
 public:
  explicit Pairs(const PeakData& data) : data_(data), n_(data.channels.size()) {
    const double below = noise_share(data.sums.below, data.lines.below_count);
    const double above = noise_share(data.sums.above, data.lines.above_count);
    const bool is_below = below >= 0.0 && (above < 0.0 || below <= above);
    quiet_ = is_below ? &data.sums.below : &data.sums.above;
    quiet_lines_ = is_below ? data.lines.below_count : data.lines.above_count;
  }

  std::size_t count(std::size_t i, std::size_t j) const { return data_.counts[i * n_ + j]; }
  /// Mean of |X_i|^2 under the peak in the blocks that i and j share, and the part of it that is noise.
  double power(std::size_t i, std::size_t j) const { return data_.sums.peak.power[i * n_ + j] / blocks(i, j); }
  double noise(std::size_t i, std::size_t j) const { return quiet_->power[i * n_ + j] / blocks(i, j) * share(); }
  Complex cross(std::size_t i, std::size_t j) const { return pair(data_.sums.peak, i, j) / blocks(i, j); }
  Complex noise_cross(std::size_t i, std::size_t j) const { return pair(*quiet_, i, j) / blocks(i, j) * share(); }
  /// Power under the peak over the noise under it; infinite without noise, 0 without a block.
  double prominence(std::size_t i) const {
    if (count(i, i) == 0 || !(power(i, i) > 0.0)) return 0.0;
    return power(i, i) / noise(i, i);
  }
  double noise_per_line(std::size_t i) const { return noise(i, i) / static_cast<double>(data_.lines.count); }

 private:
  double blocks(std::size_t i, std::size_t j) const { return static_cast<double>(count(i, j)); }
  Complex pair(const PairSums& sums, std::size_t i, std::size_t j) const {
    return i < j ? sums.cross[i * n_ + j] : std::conj(sums.cross[j * n_ + i]);
  }
  double share() const {
    return quiet_lines_ == 0 ? 0.0 : static_cast<double>(data_.lines.count) / static_cast<double>(quiet_lines_);
  }
  /// Noise of a side per line over the power under the peak, summed over channels; -1 where the side has no lines.
  double noise_share(const PairSums& side, std::size_t lines) const {
    if (lines == 0) return -1.0;
    double sum = 0.0;
    for (std::size_t i = 0; i < n_; ++i) {
      const double peak = data_.sums.peak.power[i * n_ + i];
      if (peak > 0.0) sum += side.power[i * n_ + i] / peak / static_cast<double>(lines);
    }
    return sum;
  }

  const PeakData& data_;
  std::size_t n_;
  const PairSums* quiet_ = nullptr;
  std::size_t quiet_lines_ = 0;
};

/// Where the tone is among the lines, from the power of the reference less its noise.
struct Place {
  std::vector<double> amplitudes;  ///< of the tone on the lines under the peak
  double centre = 0.0;             ///< lines from 0 Hz
  double u = 0.0;                  ///< lines: noise, and breadth beyond that of a steady tone
};

Place place_of(const PeakData& data, const Pairs& pairs, std::size_t reference) {
  const std::size_t lines = data.lines.count + 2;
  const double blocks = static_cast<double>(pairs.count(reference, reference));
  const double noise = pairs.noise_per_line(reference);
  const double first = static_cast<double>(data.lines.first) - 1.0;
  std::vector<double> power(lines);
  double sum = 0.0, moment = 0.0;
  for (std::size_t l = 0; l < lines; ++l) {
    power[l] = std::max(data.sums.line_power[reference * lines + l] / blocks - noise, 0.0);
    sum += power[l];
    moment += power[l] * (first + static_cast<double>(l));
  }
  // The lines of a window's whole transform have their centre of power exactly at the tone.
  Place place;
  place.centre = moment / sum;
  const double averages = std::max(data.averages[reference].effective, 1.0);
  double breadth = 0.0, steady = 0.0, steady_sum = 0.0, by_noise = 0.0;
  for (std::size_t l = 0; l < lines; ++l) {
    const double away = first + static_cast<double>(l) - place.centre;
    const double gain = transform(data.window, away);
    breadth += power[l] * away * away;
    steady += gain * gain * away * away;
    steady_sum += gain * gain;
    by_noise += away * away * noise * (2.0 * power[l] + noise) / averages;
    if (l > 0 && l + 1 < lines) place.amplitudes.push_back(std::sqrt(power[l]));
  }
  place.u = std::sqrt(by_noise / (sum * sum) + std::max(breadth / sum - steady / steady_sum, 0.0));
  return place;
}

/// What lines of noise beside one another are worth: L^2 / sum of rho^2 independent ones.
double independent_lines(Window window, std::size_t lines) {
  double sum = 0.0;
  for (std::size_t m = 0; m < lines; ++m) {
    const double rho = line_correlation(window, m);
    sum += (m == 0 ? 1.0 : 2.0) * static_cast<double>(lines - m) * rho * rho;
  }
  return static_cast<double>(lines * lines) / sum;
}

/// Variance of one component of the ratio, over incoherent power per line and block: noise on lines k and l goes into
/// the ratio with the tone's amplitudes there, T, so it is half of sum T_k T_l C_kl / (sum T^2)^2, C the covariance of
/// averaged noise beside a tone.
double variance_factor(const PeakData& data, const Place& place, std::size_t reference) {
  Spectrum as_averaged;
  as_averaged.window = data.window;
  as_averaged.blocks = static_cast<std::size_t>(data.averages[reference].blocks);
  as_averaged.overlaps = data.averages[reference].overlaps;
  const LineNoise noise(as_averaged);
  double products = 0.0, power = 0.0;
  const auto& t = place.amplitudes;
  for (std::size_t k = 0; k < t.size(); ++k) {
    power += t[k] * t[k];
    for (std::size_t l = 0; l < t.size(); ++l) {
      const std::size_t apart = k > l ? k - l : l - k;
      if (apart > 4) continue;
      const double middle = static_cast<double>(data.lines.first) + 0.5 * static_cast<double>(k + l);
      products += t[k] * t[l] * noise.beside_tone(apart, middle - place.centre);
    }
  }
  return 0.5 * products / (power * power);
}

std::string point_of(const recording::Channel& channel) { return channel.point.empty() ? channel.name : channel.point; }

base::Refusal low_coherence(double coherence, double limit, double frequency_hz) {
  return {"low-coherence",
          fmt::format("coherence {:.2f} with the reference at {:.4g} Hz, at least {:.2f} is needed", coherence,
                      frequency_hz, limit),
          "record longer; a point that hardly moves at this frequency stays so"};
}

}  // namespace

base::Answer<DeflectionShape> deflection_shape(const PeakData& data) {
  const Pairs pairs(data);
  const std::size_t n = data.channels.size();
  std::size_t r = data.reference.value_or(0);
  if (!data.reference) {
    for (std::size_t i = 1; i < n; ++i) {
      if (pairs.prominence(i) > pairs.prominence(r)) r = i;
    }
  }
  if (!(pairs.prominence(r) >= least_prominence)) {
    return base::Refusal{
        "no-line",
        data.reference
            ? fmt::format("the reference {} shows no line at {:.4g} Hz that stands out of its noise",
                          point_of(data.channels[r]), data.lines.asked_hz)
            : fmt::format("no channel shows a line at {:.4g} Hz that stands out of its noise", data.lines.asked_hz),
        "check the frequency, take another reference or record longer"};
  }
  const Place place = place_of(data, pairs, r);
  const double factor = variance_factor(data, place, r);
  const auto lines = static_cast<double>(data.lines.count);
  const double worth = independent_lines(data.window, data.lines.count);

  DeflectionShape shape;
  shape.asked_hz = data.lines.asked_hz;
  shape.frequency = {place.centre * data.line_hz, place.u * data.line_hz, std::nullopt, base::Quantity::frequency};
  const recording::Channel& reference = data.channels[r];
  shape.reference = point_of(reference);
  for (std::size_t j = 0; j < n; ++j) {
    const recording::Channel& channel = data.channels[j];
    Deflection d;
    d.point = point_of(channel);
    d.channel = channel.name;
    if (j == r) {
      d.magnitude = {1.0, 0.0, std::nullopt, base::Quantity::ratio};
      d.phase = base::Estimate{0.0, 0.0, std::nullopt, base::Quantity::angle};
      shape.points.push_back(std::move(d));
      continue;
    }
    const std::size_t blocks = pairs.count(r, j);
    if (blocks == 0) {
      shape.not_given.push_back(
          {d.point,
           d.channel,
           {"no-valid-block", "no block is free of missing samples in the channel and the reference", "record again"}});
      continue;
    }
    const double gxx = pairs.power(r, j), gyy = pairs.power(j, r);
    const Complex gxy = pairs.cross(r, j);
    const Complex ratio = (gxy - pairs.noise_cross(r, j)) / (gxx - pairs.noise(r, j));
    const double averages =
        data.averages[j].effective * static_cast<double>(blocks) / static_cast<double>(data.averages[j].blocks) * worth;
    if (blocks > 1) {
      d.coherence = gxx > 0.0 && gyy > 0.0 ? std::min(std::norm(gxy) / gxx / gyy, 1.0) : 0.0;
      const double by_chance = 1.0 - std::pow(noise_chance, 1.0 / std::max(averages - 1.0, 1e-3));
      const double limit = std::max(data.least_coherence, by_chance);
      if (!(*d.coherence >= limit)) {
        shape.not_given.push_back({d.point, d.channel, low_coherence(*d.coherence, limit, data.lines.asked_hz)});
        continue;
      }
    }
    // Both as the reference's quantity: the ratio of accelerations is that of displacements.
    const int integrations = integrations_between(channel.unit.quantity, reference.unit.quantity).value_or(0);
    const Complex conversion = integration_factor(integrations, shape.frequency.value);
    const Complex converted = ratio * conversion;
    d.magnitude = {std::abs(converted), std::nullopt, std::nullopt, base::Quantity::ratio};
    d.phase = base::Estimate{std::arg(converted), std::nullopt, std::nullopt, base::Quantity::angle};
    if (blocks > 1) {
      const double incoherent = std::max(gyy - 2.0 * std::real(std::conj(ratio) * gxy) + std::norm(ratio) * gxx, 0.0) *
                                averages / std::max(averages - 1.0, 0.5);
      const double shared = static_cast<double>(data.averages[r].blocks) / static_cast<double>(blocks);
      const double u = std::sqrt(incoherent / lines * factor * shared) * std::abs(conversion);
      const double by_factors =
          d.magnitude.value * std::hypot(channel.factor_u.value_or(0.0), reference.factor_u.value_or(0.0));
      d.magnitude.u = std::hypot(u, by_factors);
      d.phase->u = d.magnitude.value > 0.0 ? u / d.magnitude.value : std::numbers::pi;
      d.magnitude.dof = d.phase->dof = std::max(2.0 * (averages - 1.0), 1.0);
    }
    shape.points.push_back(std::move(d));
  }
  return shape;
}

}  // namespace stillmass::spectral
