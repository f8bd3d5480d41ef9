#include "spectral/close_judgement.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "spectral/close_fit.hpp"
#include "spectral/close_steadiness.hpp"

namespace stillmass::spectral {

namespace {

constexpr std::size_t most_tones = 3;
constexpr double least_wander = 0.25;  // lines: a lesser deviation is not told from none
constexpr double beside = 6.0;         // lines that belong to a tone, on each side

/// The Bayesian information criterion of each fit; the least wins.
std::vector<double> criteria(const std::vector<CloseFit>& fits, std::size_t lines) {
  const auto n = static_cast<double>(lines);
  std::vector<double> values;
  for (std::size_t m = 0; m < fits.size(); ++m) {
    const double residual = std::max(fits[m].residual_sum, 1e-300);
    values.push_back(2.0 * n * std::log(residual) + 5.0 * static_cast<double>(m) * std::log(n));
  }
  return values;
}

/// What a fit leaves near its tones.
struct Left {
  double noise = 0.0;    ///< mean square on a line: of the lines in general, or near the tones if that is more
  double excess = 0.0;   ///< power near the tones beyond noise, over that of the weakest tone
  bool is_noise = true;  ///< no more near the tones than elsewhere

  /// At most a tenth of the weakest tone (common practice for "explained").
  bool is_little() const { return is_noise || excess <= 0.1; }
};

Left left_by(const CloseLines& lines, const CloseFit& fit) {
  constexpr double deviations = 4.0;
  Left left;
  left.noise = line_noise(fit.residual);
  double near = 0.0;
  double count = 0.0;
  for (std::size_t i = 0; i < lines.z.size(); ++i) {
    const bool is_near = std::any_of(fit.place.begin(), fit.place.end(),
                                     [&](double place) { return std::abs(place - lines.number(i)) <= beside; });
    if (!is_near) continue;
    near += std::norm(fit.residual[i]);
    count += 1.0;
  }
  if (count == 0.0) return left;
  const double surplus = near - count * left.noise;
  // Powers of noise scatter by their mean; the median of n of them by 1.44 / sqrt n.
  const double scatter = std::sqrt(1.0 / count + 2.1 / static_cast<double>(lines.z.size()));
  left.is_noise = surplus <= deviations * scatter * count * left.noise;
  double weakest = std::abs(fit.amplitude.front());
  for (const auto& a : fit.amplitude) weakest = std::min(weakest, std::abs(a));
  left.excess = std::max(surplus, 0.0) / (weakest * weakest);
  left.noise = std::max(left.noise, near / std::max(count - 1.5 * static_cast<double>(fit.place.size()), 1.0));
  return left;
}

double least_spacing(const CloseFit& fit) {
  double least = 1e300;
  for (std::size_t j = 1; j < fit.place.size(); ++j) least = std::min(least, fit.place[j] - fit.place[j - 1]);
  return least;
}

constexpr double times = 4.0;  // phase and amplitude of a beating pair vary alike

bool only_amplitude_varies(const Steadiness& s) { return times * s.phase_rad < s.amplitude; }

/// True where phase and amplitude do not vary alike, as those of a beating pair do.
bool is_modulated(const Steadiness& s) {
  constexpr double deep = 0.25;  // a beat of two nearly equal tones turns the phase by half a turn at each null
  return (s.amplitude < deep && times * s.amplitude < s.phase_rad) || only_amplitude_varies(s);
}

/// True where lines without any tone are more than noise: something broad stands on them.
bool is_more_than_noise(const CloseFit& none) {
  const auto n = static_cast<double>(none.residual.size());
  return none.residual_sum / n > (1.0 + 10.0 / std::sqrt(n)) * line_noise(none.residual);
}

/// One stretch under judgement.
class Judge {
 public:
  Judge(std::span<const std::complex<double>> samples, const CloseScale& scale)
      : scale_(scale), line_hz_(scale.rate_hz / static_cast<double>(samples.size())) {
    const auto reach = static_cast<std::int64_t>(scale.half_width_hz / line_hz_);
    const auto most = static_cast<std::int64_t>((samples.size() - 1) / 2);
    lines_ = close_lines(samples, -std::min(reach, most), std::min(reach, most));
    fits_ = close_fits(lines_, most_tones);
  }

  CloseJudgement operator()() const {
    CloseJudgement result;
    if (fits_.size() < 2) return result;
    const auto values = criteria(fits_, lines_.z.size());
    const auto best = static_cast<std::size_t>(std::min_element(values.begin(), values.end()) - values.begin());
    const double noise = line_noise(fits_[best].residual);
    result.noise_density = 2.0 * noise / line_hz_;
    result.evidence = values[1] - values[best];
    if (best == 0) {
      if (is_more_than_noise(fits_[0])) be_unsteady(result, Humps(lines_, noise), noise);
      return result;
    }
    const Left left = left_by(lines_, fits_[best]);
    if (best == 1 && left.is_little()) {
      result.closeness = Closeness::single;
      result.tones = tones(fits_[1], left.noise);
      return result;
    }
    const auto& place = fits_[best].place;
    const Humps humps(lines_, noise);
    const double from = std::min(place.front(), humps.all().empty() ? 0.0 : humps.all().front().from) - beside;
    const double to = std::max(place.back(), humps.all().empty() ? 0.0 : humps.all().back().to) + beside;
    const Steadiness steady = steadiness(lines_, from, to, noise);
    const bool modulated = is_modulated(steady);
    constexpr double within = 1.5;  // lines: phase and amplitude of part of a beat do not tell
    const bool is_narrow = best > 1 && place.back() - place.front() < within;
    if ((!modulated || has_side_bands(steady, best)) && resolve(result, best)) return result;
    if (left.is_little() && (is_narrow || !modulated)) {
      be_unresolved(result, fits_[best]);
    } else if (!be_wandering_apart(result, humps, noise)) {
      be_unsteady(result, humps, noise);
    }
    return result;
  }

 private:
  /// A carrier whose amplitude swings regularly: three tones, the outer ones as far from the middle one, and so far
  /// that the swing repeats several times.
  bool has_side_bands(const Steadiness& steady, std::size_t best) const {
    constexpr double several = 10.0;  // lines: as many swings in the stretch; fewer are called swings
    constexpr double alike = 0.1;
    if (best != 3 || !only_amplitude_varies(steady)) return false;
    const auto& place = fits_[best].place;
    const double below = place[1] - place[0];
    const double above = place[2] - place[1];
    return std::min(below, above) >= several && std::abs(above - below) <= alike * below;
  }

  CloseTone tone(const CloseFit& fit, std::size_t j, double noise) const {
    constexpr double rms = std::numbers::sqrt2;  // of a cosine whose two sides have |A| each
    const double phase = std::arg(fit.amplitude[j]) + 2.0 * std::numbers::pi * scale_.middle_turns;
    CloseTone tone;
    tone.frequency = {scale_.centre_hz + fit.place[j] * line_hz_, std::sqrt(noise * fit.place_variance[j]) * line_hz_,
                      std::nullopt, base::Quantity::frequency};
    tone.amplitude_rms = {rms * std::abs(fit.amplitude[j]), rms * std::sqrt(noise * fit.amplitude_variance[j]),
                          std::nullopt, scale_.quantity};
    tone.phase = base::Estimate{std::remainder(phase, 2.0 * std::numbers::pi), std::sqrt(noise * fit.phase_variance[j]),
                                std::nullopt, base::Quantity::angle};
    return tone;
  }

  std::vector<CloseTone> tones(const CloseFit& fit, double noise) const {
    std::vector<CloseTone> all;
    for (std::size_t j = 0; j < fit.place.size(); ++j) all.push_back(tone(fit, j, noise));
    return all;
  }

  /// With as many tones as stand a line apart and leave little.
  bool resolve(CloseJudgement& result, std::size_t best) const {
    for (std::size_t m = best; m > 1; --m) {
      const Left left = left_by(lines_, fits_[m]);
      if (least_spacing(fits_[m]) < 1.0 || !left.is_little()) continue;
      result.closeness = Closeness::resolved;
      result.tones = tones(fits_[m], left.noise);
      return true;
    }
    return false;
  }

  void be_unresolved(CloseJudgement& result, const CloseFit& fit) const {
    constexpr double nearest = 0.05;  // lines: what two tones nearer than that are apart cannot be said
    result.closeness = Closeness::unresolved;
    const double spacing = std::clamp(least_spacing(fit), nearest, 1.0);
    result.record_s = 2.0 / (spacing * line_hz_);
    result.tones = tones(fits_[1], left_by(lines_, fits_[1]).noise);
  }

  CloseTone tone(const Hump& hump, double noise) const {
    CloseTone tone;
    tone.frequency = {scale_.centre_hz + hump.mean * line_hz_, std::max(hump.deviation, least_wander) * line_hz_,
                      std::nullopt, base::Quantity::frequency};
    const double power_u = std::sqrt(noise * (2.0 * hump.power + noise * (hump.to - hump.from + 1.0)));
    const double rms = std::sqrt(2.0 * hump.power);
    tone.amplitude_rms = {rms, rms > 0.0 ? power_u / rms : 0.0, std::nullopt, scale_.quantity};
    return tone;
  }

  /// Tones that wander, each in a hump of its own and steady in amplitude; beside the strongest, the sum beats.
  bool be_wandering_apart(CloseJudgement& result, const Humps& humps, double noise) const {
    constexpr double steady_amplitude = 0.25;
    constexpr double skirt = 3.0;   // lines
    constexpr double valley = 8.0;  // lines: wander leaves gaps narrower than that in one tone's own lines
    const auto& all = humps.all();
    if (all.size() < 2 || all.size() > most_tones) return false;
    for (std::size_t j = 1; j < all.size(); ++j) {
      if (all[j].from - all[j - 1].to < valley) return false;
    }
    const Hump& strongest =
        *std::max_element(all.begin(), all.end(), [](const Hump& a, const Hump& b) { return a.power < b.power; });
    // A tone that dwells here and then there makes humps too, each of which comes and goes.
    const bool come_and_go = std::any_of(all.begin(), all.end(), [&](const Hump& hump) {
      return steadiness(lines_, hump.from - skirt, hump.to + skirt, noise).amplitude > steady_amplitude;
    });
    if (come_and_go) return false;
    // What stands so little out of its own uncertainty may as well be the noise of a resonance beside the tone.
    const bool is_faint = std::any_of(all.begin(), all.end(), [&](const Hump& hump) {
      constexpr double clear = 6.0;
      const CloseTone each = tone(hump, noise);
      return each.amplitude_rms.value < clear * each.amplitude_rms.u.value_or(0.0);
    });
    if (is_faint) return false;
    const Steadiness sum = steadiness_beside(lines_, all.front().from - skirt, all.back().to + skirt, strongest, noise);
    if (is_modulated(sum)) return false;
    result.closeness = Closeness::resolved;
    for (const Hump& hump : all) {
      result.tones.push_back(tone(hump, noise));
      if (hump.deviation > least_wander) {
        result.wander_hz = std::max(result.wander_hz.value_or(0.0), hump.deviation * line_hz_);
      }
    }
    return true;
  }

  void be_unsteady(CloseJudgement& result, const Humps& humps, double noise) const {
    const Hump all = humps.together();
    if (!(all.power > 0.0)) return;
    result.closeness = Closeness::unsteady;
    result.wander_hz = all.deviation * line_hz_;
    result.variation =
        steadiness(lines_, humps.all().front().from - beside, humps.all().back().to + beside, noise).amplitude;
    result.tones = {tone(all, noise)};
  }

  CloseScale scale_;
  double line_hz_;
  CloseLines lines_;
  std::vector<CloseFit> fits_;
};

}  // namespace

CloseJudgement judged(std::span<const std::complex<double>> samples, const CloseScale& scale) {
  return Judge(samples, scale)();
}

}  // namespace stillmass::spectral
