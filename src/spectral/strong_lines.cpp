#include "spectral/strong_lines.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <numbers>
#include <numeric>
#include <utility>

#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

constexpr std::size_t most = 32;     // lobes looked at
constexpr std::size_t around = 24;   // lines on each side that say what a lobe stands out of
constexpr double outstanding = 1.5;  // over what noise reaches on one line in a million
constexpr double steady = 0.3;       // spread of a tone on the lowest line, whose other side the offset hides
constexpr double off_peak = 0.7;     // lines from the highest line at which the tone may stand
constexpr std::size_t widest = 11;   // lines of a lobe

/// What noise of K independent averages exceeds on one line in a million, over its mean: Wilson & Hilferty 1931,
/// 4.75 the normal quantile.
double noise_reach(double averages) {
  const double a = 1.0 / (9.0 * std::max(averages, 1.0));
  return std::pow(1.0 - a + 4.75 * std::sqrt(a), 3);
}

/// Lines on each side of the highest one that make a lobe; of the rectangle also its first side lobes.
std::size_t half_lobe(Window window) { return std::max<std::size_t>(2, static_cast<std::size_t>(lobe_bins(window))); }

/// Median of the given lines around line k, those of its lobe left out.
double level_around(const Spectrum& s, std::size_t k, std::size_t lowest) {
  const std::size_t lobe = half_lobe(s.window);
  std::vector<double> values;
  const std::size_t end = std::min(s.density.size(), k + lobe + around + 1);
  for (std::size_t j = std::max(lowest, k - std::min(k, lobe + around)); j < end; ++j) {
    if (j + lobe < k || j > k + lobe) values.push_back(s.density[j]);
  }
  if (values.empty()) return 0.0;
  const auto middle = values.begin() + std::ssize(values) / 2;
  std::nth_element(values.begin(), middle, values.end());
  return *middle;
}

/// A tone: lines from 0, mean square.
struct Fit {
  double place = 0.0;
  double power = 0.0;
  double misfit = 0.0;  ///< sum of the squares of what is left
};

struct Accuracy {
  double place_u = 0.0;
  double power_u = 0.0;  ///< relative
  double correlation = 0.0;
};

/// The lines of one lobe and a tone among them.
class Lobe {
 public:
  Lobe(const Spectrum& s, std::size_t k, std::size_t lowest)
      : window_(s.window),
        bins_(s.noise_bandwidth_hz / s.line_hz),
        peak_(k),
        first_(std::max(lowest, k - std::min(k, half_lobe(s.window)))),
        count_(std::min(s.density.size(), k + half_lobe(s.window) + 1) - first_),
        floor_(level_around(s, k, lowest) * s.line_hz),
        averages_(std::max(s.effective_averages, 1.0)) {
    for (std::size_t i = 0; i < count_; ++i) measured_[i] = s.density[first_ + i] * s.line_hz - floor_;
    power_ = measured_;
    fit_.place = static_cast<double>(k);
  }

  const Fit& fit() const { return fit_; }

  void take_off(const std::vector<Lobe>& all) {
    power_ = measured_;
    for (const Lobe& other : all) {
      const double distance = std::abs(other.fit_.place - static_cast<double>(peak_));
      if (&other == this || distance > static_cast<double>(2 * widest)) continue;
      const auto theirs = other.shares_at(other.fit_.place, first_, count_);
      for (std::size_t i = 0; i < count_; ++i) power_[i] -= other.fit_.power * theirs[i];
    }
  }

  /// Least misfit near the highest line: golden section.
  void refine() {
    constexpr double golden = 0.6180339887498949;
    double lo = static_cast<double>(peak_) - off_peak;
    double hi = static_cast<double>(peak_) + off_peak;
    Fit low = at(hi - golden * (hi - lo));
    Fit high = at(lo + golden * (hi - lo));
    while (hi - lo > 1e-5) {
      if (low.misfit < high.misfit) {
        hi = high.place;
        high = low;
        low = at(hi - golden * (hi - lo));
      } else {
        lo = low.place;
        low = high;
        high = at(lo + golden * (hi - lo));
      }
    }
    fit_ = low.misfit < high.misfit ? low : high;
  }

  /// Power by which the lines differ from the tone's, over the tone's.
  double mismatch() const {
    const auto shares = shares_at(fit_.place, first_, count_);
    double difference = 0.0;
    for (std::size_t i = 0; i < count_; ++i) difference += std::abs(power_[i] - fit_.power * shares[i]);
    return difference / fit_.power;
  }

  /// Standard uncertainties of place and power (relative) with their correlation, of the least squares: from noise on
  /// the lines, which is the floor's beside the tone's phasor (variance 2 p N + N^2 of a line of power p), or from what
  /// is left of them if that is more.
  Accuracy accuracy() const {
    constexpr double step = 1e-4;
    const auto below = shares_at(fit_.place - step, first_, count_);
    const auto above = shares_at(fit_.place + step, first_, count_);
    const auto here = shares_at(fit_.place, first_, count_);
    std::array<double, widest> slope{};
    for (std::size_t i = 0; i < count_; ++i) slope[i] = (above[i] - below[i]) / (2.0 * step);
    const double aa = dot(here, here);
    const double ab = dot(here, slope);
    const double bb = dot(slope, slope);
    const double determinant = aa * bb - ab * ab;
    const bool is_blunt = !(determinant > 1e-9 * aa * aa);
    double noise = 0.0;
    double place = 0.0;
    double power = 0.0;
    double both = 0.0;
    for (std::size_t i = 0; i < count_; ++i) {
      const double p = fit_.power * here[i];
      const double left = power_[i] - p;
      const double variance = std::max((2.0 * p * floor_ + floor_ * floor_) / averages_, left * left);
      noise += variance;
      if (is_blunt) continue;
      const double to_power = (bb * here[i] - ab * slope[i]) / determinant / fit_.power;
      const double to_place = (aa * slope[i] - ab * here[i]) / determinant / fit_.power;
      place += to_place * to_place * variance;
      power += to_power * to_power * variance;
      both += to_place * to_power * variance;
    }
    // On a line of the rectangle's spectrum power and place are parted by the lobe's bend only, 1 - pi^2/3 x^2.
    if (is_blunt) return {std::min(0.55 * std::pow(noise, 0.25) / std::sqrt(fit_.power), 0.25), 0.0, 0.0};
    const double scale = std::sqrt(place * power);
    return {std::min(std::sqrt(place), 0.25), std::sqrt(power), scale > 0.0 ? both / scale : 0.0};
  }

 private:
  std::array<double, widest> shares_at(double place, std::size_t first, std::size_t count) const {
    std::array<double, widest> shares{};
    lobe_shares(window_, bins_, place, first, std::span(shares).first(count));
    return shares;
  }

  static double dot(const std::array<double, widest>& a, const std::array<double, widest>& b) {
    return std::inner_product(a.begin(), a.end(), b.begin(), 0.0);
  }

  Fit at(double place) const {
    const auto shares = shares_at(place, first_, count_);
    Fit fit{place, std::max(dot(shares, power_) / dot(shares, shares), 0.0), 0.0};
    for (std::size_t i = 0; i < count_; ++i) {
      const double left = power_[i] - fit.power * shares[i];
      fit.misfit += left * left;
    }
    return fit;
  }

  Window window_;
  double bins_;
  std::size_t peak_;
  std::size_t first_;
  std::size_t count_;
  double floor_;
  double averages_;
  Fit fit_;
  std::array<double, widest> measured_{};
  std::array<double, widest> power_{};  // what the other tones leave
};

/// The highest lines of lobes, those first that matter most to a velocity.
std::vector<std::size_t> peaks(const Spectrum& s, std::size_t lowest) {
  const double least = outstanding * noise_reach(s.effective_averages);
  std::vector<std::pair<double, std::size_t>> found;
  for (std::size_t k = lowest; k + 1 < s.density.size(); ++k) {
    const bool is_peak = (k == lowest || s.density[k] >= s.density[k - 1]) && s.density[k] > s.density[k + 1];
    if (!is_peak || (k == lowest && !s.spread.empty() && s.spread[k] > steady)) continue;
    const auto place = static_cast<double>(k);
    found.push_back({s.density[k] / (place * place), k});
  }
  const std::size_t kept = std::min(most, found.size());
  std::partial_sort(found.begin(), found.begin() + static_cast<std::ptrdiff_t>(kept), found.end(), std::greater<>());
  found.resize(kept);
  std::vector<std::size_t> lines;
  for (const auto& [weight, k] : found) {
    if (s.density[k] > least * level_around(s, k, lowest)) lines.push_back(k);
  }
  return lines;
}

}  // namespace

bool has_far_skirts(Window window) { return window == Window::rectangle || window == Window::hamming; }

void lobe_shares(Window window, double noise_bandwidth_bins, double tone_lines, std::size_t first,
                 std::span<double> shares) {
  // As transform() of window_transform.hpp, with the one sine that all these lines share.
  const auto a = coefficients(window);
  const double off = tone_lines - std::round(tone_lines);
  const double sine = std::sin(std::numbers::pi * off) / (std::numbers::pi * a[0]);
  for (std::size_t i = 0; i < shares.size(); ++i) {
    const double x = static_cast<double>(first + i) - tone_lines;
    double amplitude = 0.0;
    if (std::abs(off) < 1e-7) {
      const auto k = static_cast<std::size_t>(std::abs(std::round(x)));
      amplitude = k == 0 ? 1.0 : (k < a.size() ? 0.5 * a[k] / a[0] : 0.0);
    } else {
      double sum = a[0] / x;
      double sign = -1.0;
      for (std::size_t k = 1; k < a.size(); ++k, sign = -sign) {
        const auto shift = static_cast<double>(k);
        sum += sign * 0.5 * a[k] * (1.0 / (x - shift) + 1.0 / (x + shift));
      }
      amplitude = sine * sum;
    }
    shares[i] = amplitude * amplitude / noise_bandwidth_bins;
  }
}

std::vector<StrongLine> strong_lines(const Spectrum& s) {
  if (s.blocks == 0 || s.averaging == Averaging::peak_hold) return {};
  const std::size_t lowest = std::max(s.first_line, static_cast<std::size_t>(lobe_bins(s.window)));
  std::vector<Lobe> lobes;
  for (const std::size_t k : peaks(s, lowest)) lobes.emplace_back(s, k, lowest);
  for (int round = 0; round < 3; ++round) {
    for (Lobe& lobe : lobes) {
      if (round > 0) lobe.take_off(lobes);
      lobe.refine();
    }
  }
  std::vector<StrongLine> found;
  for (const Lobe& lobe : lobes) {
    if (!(lobe.fit().power > 0.0)) continue;
    const Accuracy u = lobe.accuracy();
    found.push_back({lobe.fit().place * s.line_hz, u.place_u * s.line_hz, lobe.fit().power, u.power_u, u.correlation,
                     lobe.mismatch()});
  }
  std::sort(found.begin(), found.end(), [](const auto& a, const auto& b) { return a.frequency_hz < b.frequency_hz; });
  return found;
}

}  // namespace stillmass::spectral
