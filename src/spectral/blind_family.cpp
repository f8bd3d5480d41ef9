#include "stillmass/spectral/blind_family.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <utility>

#include "spectral/family_chance.hpp"

namespace stillmass::spectral {

namespace {

constexpr double widths = family_widths;

/// A way to read tones as harmonics.
struct Reading {
  double fundamental = 0.0;
  double u = 0.0;
  std::vector<FamilyMember> members;
  double chance = 1.0;
};

/// Harmonics among the tones that are still free.
class Harmonics {
 public:
  Harmonics(const FamilyTones& tones, const FamilyOptions& options) : tones_(tones), options_(options) {}

  /// The least surprising by chance, or one with no members.
  Reading best() const {
    Reading best;
    const auto free = tones_.free();
    if (free.size() < options_.members) return best;
    const double greatest_f = tones_.frequency(free.back());
    for (const std::size_t i : free) {
      for (int k = 1; k <= first_number; ++k) {
        Reading reading = refined(tones_.frequency(i) / k, tones_.u(i) / k, free, greatest_f);
        if (!judge(reading)) continue;
        if (reading.chance < best.chance) best = std::move(reading);
      }
    }
    if (best.members.empty()) return best;
    return with_strong_fundamental(without_subharmonic(std::move(best), greatest_f), greatest_f);
  }

 private:
  static constexpr int first_number = 4;  // a family without any of 1x to 4x is not told from chance by eye either

  int highest(double fundamental, double greatest_f) const {
    return std::min(options_.greatest, static_cast<int>(std::floor(greatest_f / fundamental + 0.5)));
  }

  Reading members_at(double fundamental, double u, std::span<const std::size_t> free, double greatest_f) const {
    Reading reading{fundamental, u, {}, 1.0};
    const int most = highest(fundamental, greatest_f);
    for (const std::size_t i : free) {
      const double number = std::round(tones_.frequency(i) / fundamental);
      if (number < 1.0 || number > most) continue;
      const double off = std::abs(tones_.frequency(i) - number * fundamental);
      if (off > widths * std::hypot(tones_.u(i), number * u)) continue;
      const auto k = static_cast<int>(number);
      if (!reading.members.empty() && reading.members.back().number == k) {
        const double before = std::abs(tones_.frequency(reading.members.back().tone) - number * fundamental);
        if (off < before) reading.members.back().tone = i;
      } else {
        reading.members.push_back({k, i});
      }
    }
    return reading;
  }

  /// Members, then the fundamental from them, until it settles: u shrinks and higher members are sought more sharply.
  Reading refined(double fundamental, double u, std::span<const std::size_t> free, double greatest_f) const {
    Reading reading = members_at(fundamental, u, free, greatest_f);
    constexpr int most_rounds = 4;
    for (int round = 0; round < most_rounds && reading.members.size() > 1; ++round) {
      // From the lowest members up: a far harmonic counts once the fundamental is known well enough for it.
      double weight = 0.0, sum = 0.0;
      for (const FamilyMember& member : reading.members) {
        const double relative = member.number / tones_.u(member.tone);
        const double estimate = tones_.frequency(member.tone) / member.number;
        if (weight > 0.0) {
          const double own = 1.0 / relative;
          if (std::abs(estimate - sum / weight) > widths * std::hypot(own, 1.0 / std::sqrt(weight))) continue;
        }
        weight += relative * relative;
        sum += relative * relative * estimate;
      }
      Reading next = members_at(sum / weight, 1.0 / std::sqrt(weight), free, greatest_f);
      const bool settled = next.members.size() == reading.members.size() && next.fundamental == reading.fundamental;
      reading = std::move(next);
      drop_unlikely(reading);
      if (settled) break;
    }
    return reading;
  }

  double chance_at(const Reading& reading, int k) const {
    const double u = std::hypot(tones_.typical_u(), k * reading.u);
    return tones_.chance_of_a_hit(k * reading.fundamental, widths * u);
  }

  /// Sets the chance of a reading and says whether it counts. The chance is that of the first numbers, as many as are
  /// the least likely: a few low harmonics are no less surprising because there are high tones too.
  bool judge(Reading& reading) const {
    if (reading.members.size() < options_.members || reading.members.front().number > first_number) return false;
    double least = 1.0;
    double expected = 0.0;
    int k = 0;
    for (std::size_t met = 1; met <= reading.members.size(); ++met) {
      while (k < reading.members[met - 1].number) expected += chance_at(reading, ++k);
      // The tone that set the fundamental is met for certain.
      if (met >= options_.members) least = std::min(least, chance_of_hits(expected, met - 1));
    }
    const auto prefixes = static_cast<double>(reading.members.size() - options_.members + 1);
    // Fundamentals tried: f_i / k, k as likely as 2^-k.
    const double trials = static_cast<double>(tones_.free().size()) * std::exp2(reading.members.front().number);
    reading.chance = std::min(1.0, least * prefixes * trials);
    return reading.chance <= options_.chance;
  }

  /// Takes out what stands alone beyond a stretch of empty numbers long enough for an unrelated tone to be met there.
  void drop_unlikely(Reading& reading) const {
    constexpr double likely = 0.05;
    for (std::size_t i = 2; i < reading.members.size(); ++i) {
      double expected = 0.0;
      for (int k = reading.members[i - 1].number + 1; k <= reading.members[i].number; ++k) {
        expected += chance_at(reading, k);
      }
      if (expected <= likely) continue;
      reading.members.erase(reading.members.begin() + static_cast<std::ptrdiff_t>(i));
      --i;
    }
  }

  /// That unrelated tones meet as many numbers that are no multiples of `factor`, up to the highest member.
  double chance_of_witnesses(const Reading& reading, int factor) const {
    double expected = 0.0;
    std::size_t met = 0;
    for (int k = 1; k <= reading.members.back().number; ++k) {
      if (k % factor != 0) expected += chance_at(reading, k);
    }
    for (const FamilyMember& member : reading.members) met += member.number % factor != 0;
    return chance_of_hits(expected, met);
  }

  /// The same tones as multiples of 2, 3, ... times the fundamental, where too few of them need it to be that low.
  Reading without_subharmonic(Reading reading, double greatest_f) const {
    constexpr int greatest_factor = 6;
    constexpr std::size_t least_witnesses = 2;
    for (int factor = greatest_factor; factor >= 2; --factor) {
      std::size_t kept = 0;
      for (const FamilyMember& member : reading.members) kept += member.number % factor == 0;
      const std::size_t witnesses = reading.members.size() - kept;
      if (kept < options_.members) continue;
      const bool is_needed = witnesses >= least_witnesses &&
                             (greatest_factor - 1) * chance_of_witnesses(reading, factor) <= options_.chance;
      if (is_needed) continue;
      Reading next = refined(factor * reading.fundamental, factor * reading.u, tones_.free(), greatest_f);
      if (judge(next)) return next;
    }
    return reading;
  }

  /// Where the strongest tone of all stands at a half or a third of the fundamental, it is the fundamental: a shaft's
  /// 1x with a few of its harmonics (common practice). By chance one tone in as many as there are is the strongest.
  Reading with_strong_fundamental(Reading reading, double greatest_f) const {
    for (const int part : {2, 3}) {
      const double target = reading.fundamental / part;
      const std::ptrdiff_t at = tones_.nearest(target, reading.u / part);
      if (at < 0) continue;
      const auto tone = static_cast<std::size_t>(at);
      const bool is_strongest = std::all_of(
          reading.members.begin(), reading.members.end(),
          [&](const FamilyMember& member) { return tones_.amplitude(member.tone) < tones_.amplitude(tone); });
      const double reach = widths * std::hypot(tones_.u(tone), reading.u / part);
      const double by_chance = tones_.chance_of_a_hit(target, reach) / static_cast<double>(tones_.free().size());
      if (!is_strongest || by_chance > options_.chance) continue;
      Reading next = refined(tones_.frequency(tone), tones_.u(tone), tones_.free(), greatest_f);
      if (next.members.size() > reading.members.size() && judge(next)) return next;
    }
    return reading;
  }

  const FamilyTones& tones_;
  const FamilyOptions& options_;
};

/// True where the even members are the machine's own harmonics and the odd ones stand between them: two of each at
/// least, the second there, and each odd one weaker than its even neighbours.
bool has_half_orders(std::span<const Tone> tones, const std::vector<FamilyMember>& members) {
  constexpr std::size_t least = 2;
  std::size_t odd = 0, even = 0;
  bool has_second = false;
  for (const FamilyMember& member : members) {
    has_second = has_second || member.number == 2;
    if (member.number % 2 == 0) {
      ++even;
      continue;
    }
    ++odd;
    for (const FamilyMember& beside : members) {
      if (std::abs(beside.number - member.number) != 1) continue;
      if (tones[beside.tone].amplitude_rms.value <= tones[member.tone].amplitude_rms.value) return false;
    }
  }
  return has_second && odd >= least && even >= least;
}

HarmonicFamily family_of(std::span<const Tone> tones, const Reading& reading) {
  HarmonicFamily family;
  family.fundamental = {reading.fundamental, reading.u, std::nullopt, base::Quantity::frequency};
  family.members = reading.members;
  family.chance = reading.chance;
  family.half_orders = has_half_orders(tones, reading.members);
  auto member = reading.members.begin();
  for (int k = 1; k < reading.members.back().number; ++k) {
    while (member->number < k) ++member;
    if (member->number != k) family.missing.push_back(k);
  }
  return family;
}

}  // namespace

std::vector<Tone> gathered(std::span<const std::vector<Tone>> channels, double line_hz) {
  std::vector<Tone> all;
  for (const auto& tones : channels) all.insert(all.end(), tones.begin(), tones.end());
  std::stable_sort(all.begin(), all.end(),
                   [](const Tone& a, const Tone& b) { return a.frequency.value < b.frequency.value; });
  const auto u_of = [&](const Tone& tone) { return least_u(tone, line_hz); };
  std::vector<Tone> joined;
  std::vector<double> weight;  // of the joined frequency
  for (const Tone& tone : all) {
    const double own = 1.0 / (u_of(tone) * u_of(tone));
    const bool is_same = !joined.empty() && std::abs(tone.frequency.value - joined.back().frequency.value) <=
                                                widths * std::sqrt(1.0 / own + 1.0 / weight.back());
    if (!is_same) {
      joined.push_back(tone);
      weight.push_back(own);
      continue;
    }
    Tone& there = joined.back();
    const double mean = (there.frequency.value * weight.back() + tone.frequency.value * own) / (weight.back() + own);
    if (tone.amplitude_rms.value > there.amplitude_rms.value) there = tone;
    weight.back() += own;
    there.frequency.value = mean;
    there.frequency.u = 1.0 / std::sqrt(weight.back());
  }
  return joined;
}

namespace {

std::vector<HarmonicFamily> harmonic_families(std::span<const Tone> tones, FamilyTones list,
                                              const FamilyOptions& options) {
  std::vector<HarmonicFamily> found;
  while (found.size() < options.most) {
    const Reading reading = Harmonics(list, options).best();
    if (reading.members.empty()) break;
    found.push_back(family_of(tones, reading));
    for (const FamilyMember& member : reading.members) list.take_out(member.tone);
  }
  std::stable_sort(found.begin(), found.end(),
                   [](const HarmonicFamily& a, const HarmonicFamily& b) { return a.chance < b.chance; });
  return found;
}

}  // namespace

Families families(std::span<const Tone> tones, double line_hz, const FamilyOptions& options) {
  Families found;
  FamilyTones list(tones, line_hz);
  found.harmonics = harmonic_families(tones, list, options);
  found.side_bands = side_band_families(list, found.harmonics, options);
  if (found.side_bands.empty()) return found;
  // Side bands crowd the list: without them, harmonics that they stood about may be plain.
  std::vector<std::size_t> sides;
  for (const SideBandFamily& family : found.side_bands) {
    for (const FamilyMember& member : family.members) sides.push_back(member.tone);
  }
  for (const HarmonicFamily& family : found.harmonics) {
    for (const FamilyMember& member : family.members) std::erase(sides, member.tone);
  }
  if (sides.empty()) return found;
  found.harmonics = harmonic_families(tones, list.without(sides), options);
  found.side_bands = side_band_families(list, found.harmonics, options);
  return found;
}

}  // namespace stillmass::spectral
