#include "spectral/tone_refine.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

#include "stillmass/numeric/decomposition.hpp"
#include "stillmass/numeric/matrix.hpp"
#include "stillmass/numeric/statistics.hpp"

#include "spectral/measured.hpp"
#include "spectral/window_transform.hpp"

namespace stillmass::spectral {

namespace {

constexpr std::size_t most_leaks = 3;
constexpr std::size_t most_sources = 60;  // the strongest tones; what others leak is noise
constexpr double counts = 0.1;            // of the noise on a line: lesser leaks are left alone

/// What reaches into a tone's lines from elsewhere.
struct Leak {
  double place = 0.0;      ///< lines
  double amplitude = 0.0;  ///< r.m.s. value of the tone it comes from
  double reach = 0.0;      ///< what it is on the tone's lines, at most
  int image = 0;           ///< of the tone itself: -1 about 0, 1 about rate/2
  bool is_modelled = false;
  bool is_own = false;
};

class Refinement {
 public:
  Refinement(const Spectrum& s, const LineNoise& noise, std::span<Tone> tones)
      : s_(s), noise_(noise), tones_(tones), turn_lines_(s.rate_hz / s.line_hz) {}

  void operator()() {
    constexpr int rounds = 6;
    constexpr double settled = 1e-9;  // lines
    const std::vector<Tone> before(tones_.begin(), tones_.end());
    for (int round = 0; round < rounds; ++round) {
      double moved = 0.0;
      for (std::size_t i = 0; i < tones_.size(); ++i) {
        const double place = place_of(tones_[i]);
        refit(i, before[i]);
        moved = std::max(moved, std::abs(place_of(tones_[i]) - place));
      }
      if (moved < settled) break;
    }
  }

 private:
  double place_of(const Tone& tone) const { return tone.frequency.value / s_.line_hz; }
  double w(double d) const { return transform(s_.window, d); }
  double power(std::size_t k) const { return s_.density[k] * s_.noise_bandwidth_hz; }

  /// Greatest first; the images of all tones and the other tones.
  std::vector<Leak> leaks_into(std::size_t i) const {
    std::vector<Leak> leaks;
    const double here = place_of(tones_[i]);
    const double half = lobe_bins(s_.window);
    for (std::size_t j = 0; j < tones_.size(); ++j) {
      if (j >= most_sources && j != i) continue;
      const double a = tones_[j].amplitude_rms.value;
      const double there = place_of(tones_[j]);
      const auto add = [&](double place, int image) {
        const double distance = std::max(std::abs(place - here) - half, half);
        leaks.push_back({place, a, a * transform_envelope(s_.window, distance), j == i ? image : 0, false, j == i});
      };
      if (j != i) add(there, 0);
      add(-there, -1);
      add(turn_lines_ - there, 1);
    }
    std::stable_sort(leaks.begin(), leaks.end(), [](const Leak& a, const Leak& b) { return a.reach > b.reach; });
    return leaks;
  }

  /// Power of the noise on a line: median over the lines around, what leaks there taken off.
  double floor_around(const Tone& tone, const std::vector<Leak>& leaks) const {
    constexpr std::size_t most = 12;
    const std::size_t reach = floor_lines(s_.window);
    const std::size_t from = std::max({tone.line - std::min(tone.line, reach), s_.first_line, std::size_t{1}});
    const std::size_t to = std::min(tone.line + reach, s_.density.size() - 2);
    const double lobe = lobe_bins(s_.window);
    std::vector<double> around;
    for (std::size_t k = from; k <= to; ++k) {
      const auto at = static_cast<double>(k);
      double rest = power(k);
      bool in_lobe = std::abs(place_of(tone) - at) < lobe;
      rest -= std::pow(tone.amplitude_rms.value * w(at - place_of(tone)), 2);
      for (std::size_t j = 0; j < std::min(most, leaks.size()); ++j) {
        in_lobe = in_lobe || std::abs(leaks[j].place - at) < lobe;
        rest -= std::pow(leaks[j].amplitude * w(at - leaks[j].place), 2);
      }
      around.push_back(in_lobe ? power(k) : std::abs(rest));
    }
    return around.empty() ? 0.0 : numeric::median(std::move(around)) / median_over_mean(s_.effective_averages);
  }

  /// Parameters: place, power, then the c of the modelled leaks. What `rest` holds on line k.
  double model(double k, const std::vector<double>& p, const std::vector<Leak>& leaks) const {
    const double own = w(k - p[0]);
    double sum = p[1] * own * own;
    std::size_t next = 2;
    for (const Leak& leak : leaks) {
      double place = leak.place;
      if (leak.image != 0) place = leak.image < 0 ? -p[0] : turn_lines_ - p[0];
      const double there = w(k - place);
      if (leak.is_modelled) sum += p[next++] * own * there;
      sum += (leak.image != 0 ? p[1] : leak.amplitude * leak.amplitude) * there * there;
    }
    return sum;
  }

  static bool is_near(double power, const Tone& first) {
    constexpr double times = 1.5;
    const double before = first.amplitude_rms.value;
    return power > before * before / (times * times) && power < before * before * times * times;
  }

  void refit(std::size_t i, const Tone& first) {
    Tone& tone = tones_[i];
    auto leaks = leaks_into(i);
    const double floor = floor_around(tone, leaks);
    const double noise_amplitude = std::sqrt(0.5 * floor * noise_.beside_tone(0, 0.0));
    const bool always = s_.window == Window::rectangle;
    if (!always && (leaks.empty() || leaks.front().reach < counts * noise_amplitude)) return;

    const auto half = static_cast<std::ptrdiff_t>(std::max(lobe_bins(s_.window), 3.0));
    std::vector<std::size_t> lines;
    for (std::ptrdiff_t offset = -half; offset <= half; ++offset) {
      const std::ptrdiff_t k = static_cast<std::ptrdiff_t>(tone.line) + offset;
      const bool inside = k >= std::max<std::ptrdiff_t>(1, static_cast<std::ptrdiff_t>(s_.first_line)) &&
                          k + 1 < static_cast<std::ptrdiff_t>(s_.density.size());
      if (inside) lines.push_back(static_cast<std::size_t>(k));
    }
    std::size_t modelled = 0;
    double unmodelled = 0.0;
    for (Leak& leak : leaks) {
      leak.is_modelled = modelled < most_leaks && lines.size() > modelled + 3 && leak.reach > counts * noise_amplitude;
      modelled += leak.is_modelled;
      if (!leak.is_modelled) unmodelled += leak.reach * leak.reach;
    }
    const std::size_t unknowns = 2 + modelled;
    if (lines.size() < unknowns + 1) return;

    // What neither moves with the tone nor is fitted is taken off once.
    std::vector<double> rest;
    for (const std::size_t k : lines) {
      double others = floor;
      for (const Leak& leak : leaks) {
        if (!leak.is_modelled && leak.image == 0) {
          others += std::pow(leak.amplitude * w(static_cast<double>(k) - leak.place), 2);
        }
      }
      rest.push_back(power(k) - others);
    }
    std::erase_if(leaks, [](const Leak& leak) { return !leak.is_modelled && leak.image == 0; });

    std::vector<double> p(unknowns, 0.0);
    p[0] = place_of(tone);
    p[1] = tone.amplitude_rms.value * tone.amplitude_rms.value;
    std::vector<double> weight;
    for (const std::size_t k : lines) {
      const double noise = floor + 2.0 * unmodelled + 1e-14 * p[1];
      weight.push_back(1.0 / (noise * (2.0 * std::max(power(k) - floor, 0.0) + noise)));
    }
    numeric::Matrix design(lines.size(), unknowns);
    std::optional<numeric::Matrix> inverse;
    for (int step = 0; step < 12; ++step) {
      const double moved = improve(lines, weight, rest, leaks, p, design, inverse);
      if (!inverse || !(std::abs(p[0] - place_of(first)) < 0.75) || !is_near(p[1], first)) return;
      if (moved < 1e-9) break;
    }
    tone.frequency.value = p[0] * s_.line_hz;
    tone.amplitude_rms.value = std::sqrt(p[1]);
    tone.line = static_cast<std::size_t>(
        std::clamp<double>(std::round(p[0]), static_cast<double>(lines.front()), static_cast<double>(lines.back())));
    if (s_.window == Window::flat_top || tone.line != first.line) tone.line = first.line;
    set_uncertainty(tone, lines, weight, floor, leaks, unmodelled, p, design, *inverse);
  }

  /// One step of Gauss and Newton; how far the place moved.
  double improve(const std::vector<std::size_t>& lines, const std::vector<double>& weight,
                 const std::vector<double>& rest, const std::vector<Leak>& leaks, std::vector<double>& p,
                 numeric::Matrix& design, std::optional<numeric::Matrix>& inverse) const {
    constexpr double h = 1e-5;
    const std::size_t unknowns = p.size();
    const std::vector<double> scale = scales(p);
    numeric::Matrix normal(unknowns, unknowns);
    std::vector<double> gradient(unknowns, 0.0);
    for (std::size_t r = 0; r < lines.size(); ++r) {
      const auto k = static_cast<double>(lines[r]);
      const double off = rest[r] - model(k, p, leaks);
      for (std::size_t a = 0; a < unknowns; ++a) {
        const double step = a == 0 ? h : scale[a];  // all but the place are linear
        std::vector<double> up = p, down = p;
        up[a] += step;
        down[a] -= step;
        design(r, a) = (model(k, up, leaks) - model(k, down, leaks)) / (2.0 * step) * scale[a];
      }
      for (std::size_t a = 0; a < unknowns; ++a) {
        gradient[a] += weight[r] * design(r, a) * off;
        for (std::size_t b = 0; b < unknowns; ++b) normal(a, b) += weight[r] * design(r, a) * design(r, b);
      }
    }
    // |c| is at most twice the product of the amplitudes: that holds it where the lines do not.
    std::size_t next = 2;
    for (const Leak& leak : leaks) {
      if (!leak.is_modelled) continue;
      const double holding = scale[next] * scale[next] / (p[1] * leak.amplitude * leak.amplitude);
      normal(next, next) += holding;
      gradient[next] -= holding * p[next] / scale[next];
      ++next;
    }
    inverse = numeric::inverse_positive_definite(normal);
    if (!inverse) return 0.0;
    const auto move = numeric::product(*inverse, gradient);
    const double largest = 0.2;
    const double shorten = std::min(1.0, largest / std::max(std::abs(move[0]), 1e-300));
    for (std::size_t a = 0; a < unknowns; ++a) p[a] += shorten * move[a] * scale[a];
    return std::abs(move[0]);
  }

  /// Of the parameters, so that all columns are of one size: place in lines, all others as the power.
  static std::vector<double> scales(const std::vector<double>& p) {
    std::vector<double> scale(p.size(), std::max(std::abs(p[1]), 1e-300));
    scale[0] = 1.0;
    return scale;
  }

  void set_uncertainty(Tone& tone, const std::vector<std::size_t>& lines, const std::vector<double>& weight,
                       double floor, const std::vector<Leak>& leaks, double unmodelled, const std::vector<double>& p,
                       const numeric::Matrix& design, const numeric::Matrix& inverse) const {
    const std::size_t n = lines.size();
    const auto scale = scales(p);
    // How place and power follow the errors of the lines' powers.
    std::vector<double> on_place(n), on_power(n);
    for (std::size_t r = 0; r < n; ++r) {
      for (std::size_t a = 0; a < p.size(); ++a) {
        on_place[r] += inverse(0, a) * design(r, a) * weight[r] * scale[0];
        on_power[r] += inverse(1, a) * design(r, a) * weight[r] * scale[1];
      }
    }
    double of_leaks = unmodelled;
    for (const Leak& leak : leaks) of_leaks += leak.is_modelled ? leak.reach * leak.reach : 0.0;
    std::vector<double> amplitude(n), excess(n, 1.0);
    for (std::size_t r = 0; r < n; ++r) {
      const double clean = std::max(power(lines[r]) - floor, 0.0);
      amplitude[r] = std::sqrt(clean);
      const double expected = floor * (2.0 * clean + floor) + 2.0 * clean * of_leaks;
      if (s_.spread.empty() || s_.blocks < 8 || !(expected > 0.0)) continue;
      excess[r] = std::max(s_.spread[lines[r]] * power(lines[r]) / std::sqrt(expected), 1.0);
    }
    double of_place = 0.0, of_power = 0.0;
    for (std::size_t r = 0; r < n; ++r) {
      for (std::size_t q = 0; q < n; ++q) {
        const std::size_t apart = lines[r] > lines[q] ? lines[r] - lines[q] : lines[q] - lines[r];
        const double level = floor;
        const double middle = 0.5 * static_cast<double>(lines[r] + lines[q]) - p[0];
        double c = 2.0 * level * amplitude[r] * sign(lines[r], p[0]) * amplitude[q] * sign(lines[q], p[0]) *
                       noise_.beside_tone(apart, middle) +
                   level * level * noise_.of_power(apart);
        if (r == q) c += 4.0 * amplitude[r] * amplitude[r] * unmodelled;
        c *= excess[r] * excess[q];
        of_place += on_place[r] * on_place[q] * c;
        of_power += on_power[r] * on_power[q] * c;
      }
    }
    // The rectangle's neighbours are 0 where a tone stands on a line: their power tells its place no better than this,
    // nor on which side it stands.
    // Beside strong tones the fit of so slowly falling side lobes may settle elsewhere: by about what leaks in.
    if (s_.window == Window::rectangle) {
      of_place += 0.5 * floor * std::sqrt(noise_.of_power(0)) / p[1];
      for (const Leak& leak : leaks) of_place += leak.is_own ? 0.0 : 0.5 * leak.reach * leak.reach / p[1];
    }
    tone.frequency.u = std::sqrt(std::max(of_place, 0.0)) * s_.line_hz;
    tone.amplitude_rms.u = 0.5 * std::sqrt(std::max(of_power, 0.0)) / tone.amplitude_rms.value;
  }

  /// Of the tone's transform on a line: side lobes take turns.
  double sign(std::size_t k, double place) const { return w(static_cast<double>(k) - place) < 0.0 ? -1.0 : 1.0; }

  const Spectrum& s_;
  const LineNoise& noise_;
  std::span<Tone> tones_;
  double turn_lines_;
};

}  // namespace

void refine(const Spectrum& measured, const LineNoise& noise, std::vector<Tone>& tones) {
  Refinement(measured, noise, tones)();
}

}  // namespace stillmass::spectral
