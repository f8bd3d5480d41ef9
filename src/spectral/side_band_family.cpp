#include <algorithm>
#include <cmath>
#include <optional>
#include <utility>

#include "spectral/family_chance.hpp"

namespace stillmass::spectral {

namespace {

/// Side bands of one spacing about one carrier.
struct Proposal {
  std::size_t carrier = 0;
  double spacing = 0.0;
  double u = 0.0;
  std::vector<FamilyMember> members;
  bool taken = false;
};

class SideBands {
 public:
  SideBands(const FamilyTones& tones, std::span<const HarmonicFamily> harmonics, const FamilyOptions& options)
      : tones_(tones), harmonics_(harmonics), options_(options) {
    for (const std::size_t carrier : tones.free()) {
      for (const std::size_t side : tones.free()) propose(carrier, side);
    }
  }

  std::vector<SideBandFamily> operator()() {
    std::vector<SideBandFamily> families;
    std::size_t spacings = 0;
    while (spacings < options_.most) {
      std::vector<SideBandFamily> next = least_by_chance();
      if (next.empty()) break;
      for (SideBandFamily& family : next) {
        std::erase_if(proposals_, [&](const Proposal& p) { return uses(p, family); });
        families.push_back(std::move(family));
      }
      ++spacings;
    }
    return families;
  }

 private:
  /// Members about a carrier, all weaker than it; the lowest numbers first, each sharpening the spacing for the next.
  std::vector<FamilyMember> members(std::size_t carrier, double& spacing, double& u) const {
    std::vector<FamilyMember> found;
    double weight = 0.0, sum = 0.0;
    for (int k = 1; k <= options_.greatest_side; ++k) {
      for (const int number : {-k, k}) {
        const double at = tones_.frequency(carrier) + number * spacing;
        if (at <= 0.0) continue;
        const auto tone = tones_.nearest(at, std::hypot(tones_.u(carrier), k * u));
        if (tone < 0 || static_cast<std::size_t>(tone) == carrier) continue;
        const auto i = static_cast<std::size_t>(tone);
        if (tones_.amplitude(i) >= tones_.amplitude(carrier)) continue;
        found.push_back({number, i});
        const double own = std::hypot(tones_.u(i), tones_.u(carrier)) / k;
        weight += 1.0 / (own * own);
        sum += (tones_.frequency(i) - tones_.frequency(carrier)) / number / (own * own);
      }
      if (weight > 0.0) {
        spacing = sum / weight;
        u = 1.0 / std::sqrt(weight);
      }
      if (k >= 2 && found.size() < static_cast<std::size_t>(k)) break;  // side bands that begin far out are none
    }
    std::sort(found.begin(), found.end(), [](const auto& a, const auto& b) { return a.number < b.number; });
    return found;
  }

  /// Both next to the carrier, or three of which one is next to it.
  static bool is_enough(const std::vector<FamilyMember>& members) {
    const auto has = [&](int k) {
      return std::any_of(members.begin(), members.end(), [=](const FamilyMember& m) { return m.number == k; });
    };
    return (has(-1) && has(1)) || (members.size() >= 3 && (has(-1) || has(1)));
  }

  void propose(std::size_t carrier, std::size_t side) {
    if (side == carrier || tones_.amplitude(side) >= tones_.amplitude(carrier)) return;
    ++trials_;
    Proposal p{carrier,
               std::abs(tones_.frequency(side) - tones_.frequency(carrier)),
               std::hypot(tones_.u(side), tones_.u(carrier)),
               {},
               false};
    // Two different tones less than their uncertainty apart are one.
    if (p.spacing <= 2.0 * family_widths * p.u) return;
    p.members = members(carrier, p.spacing, p.u);
    if (!is_enough(p.members) || is_run_of_harmonics(p)) return;
    const bool known = std::any_of(proposals_.begin(), proposals_.end(), [&](const Proposal& other) {
      return other.carrier == carrier && is_same(other, p);
    });
    if (!known) proposals_.push_back(std::move(p));
  }

  static bool is_same(const Proposal& a, const Proposal& b) {
    return std::abs(a.spacing - b.spacing) <= family_widths * std::hypot(a.u, b.u);
  }

  /// That unrelated tones stand on as many of a carrier's places. `given`: tones that set the spacing.
  double chance(const Proposal& p, std::size_t given) const {
    int reach = 1;
    for (const FamilyMember& m : p.members) reach = std::max(reach, std::abs(m.number));
    double expected = 0.0;
    for (int k = -reach; k <= reach; ++k) {
      const double at = tones_.frequency(p.carrier) + k * p.spacing;
      if (k == 0 || at <= 0.0) continue;
      const double u = std::hypot(tones_.typical_u(), tones_.u(p.carrier), k * p.u);
      expected += tones_.chance_of_a_hit(at, family_widths * u);
    }
    return chance_of_hits(expected, p.members.size() - given);
  }

  /// The family whose fundamental this spacing is.
  std::optional<std::size_t> harmonics_of(const Proposal& p) const {
    for (std::size_t i = 0; i < harmonics_.size(); ++i) {
      const base::Estimate& f = harmonics_[i].fundamental;
      const double machine = harmonics_[i].half_orders ? 2.0 : 1.0;
      for (const double factor : {1.0, machine}) {
        const double u = std::hypot(p.u, factor * f.u.value_or(0.0));
        if (std::abs(p.spacing - factor * f.value) <= family_widths * u) return i;
      }
    }
    return std::nullopt;
  }

  /// Harmonics are as far apart as their fundamental, or a multiple of it: side bands of it they are only where the
  /// carrier's group stands apart from the low harmonics.
  bool is_run_of_harmonics(const Proposal& p) const {
    constexpr int least_number = 8;  // a tooth or vane number, not a low harmonic (common practice)
    for (const HarmonicFamily& family : harmonics_) {
      const auto number_of = [&](std::size_t tone) {
        for (const FamilyMember& m : family.members) {
          if (m.tone == tone) return m.number;
        }
        return 0;
      };
      // The carrier may be an unrelated tone beside a harmonic.
      const auto carrier = static_cast<int>(std::lround(tones_.frequency(p.carrier) / family.fundamental.value));
      int lowest = carrier;
      std::size_t also = 0;
      for (const FamilyMember& m : p.members) {
        const int number = number_of(m.tone);
        if (number > 0) lowest = std::min(lowest, number);
        also += number > 0;
      }
      if (2 * also < p.members.size()) continue;
      int run = 0;
      for (const FamilyMember& m : family.members) {
        if (m.number == run + 1) ++run;
      }
      if (carrier < least_number || lowest <= run) return true;
    }
    return false;
  }

  static bool uses(const Proposal& p, const SideBandFamily& family) {
    if (p.carrier == family.carrier) {
      return std::any_of(p.members.begin(), p.members.end(), [&](const FamilyMember& a) {
        return std::any_of(family.members.begin(), family.members.end(),
                           [&](const FamilyMember& b) { return a.tone == b.tone; });
      });
    }
    // A side band is no carrier of side bands at the same places.
    return std::any_of(family.members.begin(), family.members.end(),
                       [&](const FamilyMember& m) { return m.tone == p.carrier; });
  }

  std::vector<SideBandFamily> least_by_chance() const {
    double least = options_.chance;
    std::vector<const Proposal*> best;
    std::optional<std::size_t> of;
    const auto carriers = static_cast<double>(tones_.free().size());
    for (const Proposal& first : proposals_) {
      const auto known = harmonics_of(first);
      double total = known ? carriers * static_cast<double>(harmonics_.size()) * chance(first, 0)
                           : static_cast<double>(trials_) * chance(first, 1);
      std::vector<const Proposal*> shared{&first};
      for (const Proposal& other : proposals_) {
        if (other.carrier == first.carrier || !is_same(first, other)) continue;
        const double factor = carriers * chance(other, 0);
        if (factor >= 1.0) continue;
        total *= factor;
        shared.push_back(&other);
      }
      if (total > least) continue;
      least = total;
      best = std::move(shared);
      of = known;
    }
    std::vector<SideBandFamily> families;
    double weight = 0.0, sum = 0.0;
    for (const Proposal* p : best) {
      weight += 1.0 / (p->u * p->u);
      sum += p->spacing / (p->u * p->u);
    }
    for (const Proposal* p : best) {
      SideBandFamily family;
      family.carrier = p->carrier;
      family.spacing = {sum / weight, 1.0 / std::sqrt(weight), std::nullopt, base::Quantity::frequency};
      family.members = p->members;
      family.spacing_of = of;
      family.chance = least;
      family.symmetric = std::all_of(p->members.begin(), p->members.end(), [&](const FamilyMember& a) {
        return std::any_of(p->members.begin(), p->members.end(),
                           [&](const FamilyMember& b) { return b.number == -a.number; });
      });
      families.push_back(std::move(family));
    }
    return families;
  }

  const FamilyTones& tones_;
  std::span<const HarmonicFamily> harmonics_;
  const FamilyOptions& options_;
  std::vector<Proposal> proposals_;
  std::size_t trials_ = 0;
};

}  // namespace

std::vector<SideBandFamily> side_band_families(const FamilyTones& tones, std::span<const HarmonicFamily> harmonics,
                                               const FamilyOptions& options) {
  return SideBands(tones, harmonics, options)();
}

}  // namespace stillmass::spectral
