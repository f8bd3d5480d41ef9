#include "spectral/family_chance.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "stillmass/numeric/distribution.hpp"
#include "stillmass/numeric/statistics.hpp"

namespace stillmass::spectral {

double least_u(const Tone& tone, double line_hz) { return std::max(tone.frequency.u.value_or(0.0), 0.05 * line_hz); }

FamilyTones::FamilyTones(std::span<const Tone> tones, double line_hz) : tones_(tones), free_(tones.size()) {
  std::iota(free_.begin(), free_.end(), std::size_t{0});
  std::stable_sort(free_.begin(), free_.end(), [&](auto a, auto b) { return frequency(a) < frequency(b); });
  std::erase_if(free_, [&](std::size_t i) { return !(frequency(i) > 0.0); });
  for (const Tone& tone : tones) u_.push_back(least_u(tone, line_hz));
  count();
}

FamilyTones FamilyTones::without(std::span<const std::size_t> tones) const {
  FamilyTones rest = *this;
  std::erase_if(rest.free_, [&](std::size_t i) { return std::find(tones.begin(), tones.end(), i) != tones.end(); });
  rest.count();
  return rest;
}

void FamilyTones::count() {
  ascending_.clear();
  std::vector<double> us;
  for (const std::size_t i : free_) {
    ascending_.push_back(frequency(i));
    us.push_back(u_[i]);
  }
  density_ = 0.0;
  if (free_.size() < 2) return;
  typical_u_ = numeric::median(std::move(us));
  const double span = ascending_.back() - ascending_.front();
  density_ = span > 0.0 ? static_cast<double>(free_.size()) / span : 0.0;
}

double FamilyTones::chance_of_a_hit(double frequency_hz, double tolerance_hz) const {
  constexpr std::size_t neighbours = 8;
  double density = density_;
  if (ascending_.size() > neighbours) {
    const auto after = static_cast<std::size_t>(std::lower_bound(ascending_.begin(), ascending_.end(), frequency_hz) -
                                                ascending_.begin());
    std::size_t from = after > neighbours / 2 ? after - neighbours / 2 : 0;
    from = std::min(from, ascending_.size() - neighbours - 1);
    const double width = ascending_[from + neighbours] - ascending_[from];
    if (width > 0.0) density = std::max(density, static_cast<double>(neighbours) / width);
  }
  return -std::expm1(-2.0 * tolerance_hz * density);
}

std::ptrdiff_t FamilyTones::nearest(double frequency_hz, double u_hz) const {
  const auto after = std::lower_bound(free_.begin(), free_.end(), frequency_hz,
                                      [&](std::size_t i, double f) { return frequency(i) < f; });
  std::ptrdiff_t best = -1;
  double least = 0.0;
  const auto look = [&](std::size_t i) {
    const double off = std::abs(frequency(i) - frequency_hz);
    if (off > family_widths * std::hypot(u(i), u_hz)) return;
    if (best >= 0 && off >= least) return;
    best = static_cast<std::ptrdiff_t>(i);
    least = off;
  };
  if (after != free_.end()) look(*after);
  if (after != free_.begin()) look(*(after - 1));
  return best;
}

double chance_of_hits(double expected, std::size_t met) {
  if (met == 0) return 1.0;
  if (!(expected > 0.0)) return 0.0;
  return numeric::chi_square_cdf(2.0 * expected, 2.0 * static_cast<double>(met));
}

}  // namespace stillmass::spectral
