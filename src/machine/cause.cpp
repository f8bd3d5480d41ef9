#include "stillmass/machine/cause.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/machine/forcing.hpp"

namespace stillmass::machine {
namespace {

constexpr double loose = 0.01;     // 3 u above this share of the frequency: a loose fit
constexpr double furthest = 0.02;  // share of the frequency beyond which nothing fits
constexpr double far_lines = 3.0;  // nor beyond so many lines, where that is more

double tight_reach(double frequency, double resolution_hz) { return std::max(resolution_hz, loose * frequency); }

struct Fit {
  std::size_t forcing = 0;
  double distance = 0.0;
  double u = 0.0;
  bool tight = true;
  bool alone = true;  // explains a peak by itself
  int rank = 0;
};

// The forcing frequencies that the peak may be, nearest first.
std::vector<Fit> fits(const base::Estimate& peak, double resolution_hz, std::span<const Forcing> forcing) {
  const double peak_u = peak.u.value_or(resolution_hz / std::sqrt(12.0));
  const double bound = std::max(furthest * peak.value, far_lines * resolution_hz);
  std::vector<Fit> out;
  for (std::size_t i = 0; i < forcing.size(); ++i) {
    const double u = std::hypot(peak_u, forcing[i].frequency.u.value_or(0.0));
    const double distance = std::abs(peak.value - forcing[i].frequency.value);
    if (distance > std::min(std::max(resolution_hz, 3.0 * u), bound)) continue;
    const bool tight = 3.0 * u <= tight_reach(peak.value, resolution_hz);
    out.push_back({i, distance, u, tight, tight || forcing[i].of.empty(), forcing[i].rank});
  }
  std::stable_sort(out.begin(), out.end(), [](const Fit& a, const Fit& b) { return a.distance < b.distance; });
  return out;
}

// Puts those that count first, in their order, and says how many they are.
std::size_t put_best_first(std::vector<Fit>& found, double resolution_hz) {
  auto end = found.end();
  const auto keep = [&](const auto& counts) { end = std::stable_partition(found.begin(), end, counts); };
  if (std::any_of(found.begin(), found.end(), [](const Fit& fit) { return fit.tight; })) {
    keep([](const Fit& fit) { return fit.tight; });
  } else {
    keep([](const Fit& fit) { return fit.alone; });
  }
  if (end == found.begin()) return 0;
  const double near = std::max({found.front().distance, found.front().u, 0.25 * resolution_hz});
  keep([&](const Fit& fit) { return fit.distance <= 3.0 * near; });
  int rank = found.front().rank;
  for (auto each = found.begin(); each != end; ++each) rank = std::min(rank, each->rank);
  keep([&](const Fit& fit) { return fit.rank == rank; });
  return static_cast<std::size_t>(end - found.begin());
}

std::optional<std::size_t> mode_at(double frequency, std::span<const modal::Mode> modes) {
  std::optional<std::size_t> nearest;
  for (std::size_t i = 0; i < modes.size(); ++i) {
    const auto distance = [&](std::size_t k) { return std::abs(frequency - modes[k].frequency.value); };
    const modal::Mode& mode = modes[i];
    const double reach = mode.damping_ratio.value * mode.frequency.value + 2.0 * mode.frequency.u.value_or(0.0);
    if (distance(i) <= reach && (!nearest || distance(i) < distance(*nearest))) nearest = i;
  }
  return nearest;
}

base::Strength strength_of(const Fit& only) {
  const int steps = (only.tight ? 0 : 1) + (only.rank > 0 ? 1 : 0);
  return steps == 0 ? base::Strength::strong : steps == 1 ? base::Strength::fair : base::Strength::weak;
}

void call_ambiguous(Cause& cause, std::span<const Fit> alike, std::span<const Forcing> forcing, double resolution_hz) {
  cause.ambiguous = true;
  for (const Fit& fit : alike) cause.text += (cause.text.empty() ? "" : " or ") + forcing[fit.forcing].name;
  const double apart = std::abs(forcing[alike[0].forcing].frequency.value - forcing[alike[1].forcing].frequency.value);
  cause.text += fmt::format(" (not separated: {:.2g} Hz apart, lines {:.2g} Hz)", apart, resolution_hz);
}

// Whether a peak of the same channel is the fundamental of that harmonic, and stands where the harmonic says.
bool confirmed(std::span<const Peak> peaks, std::size_t of, std::span<const Cause> causes,
               std::span<const Forcing> forcing, std::size_t harmonic, double resolution_hz) {
  const Forcing& wanted = forcing[harmonic];
  const double line_u = resolution_hz / std::sqrt(12.0);
  for (std::size_t i = 0; i < peaks.size(); ++i) {
    const auto& found = causes[i].forcing;
    if (i == of || peaks[i].channel != peaks[of].channel || !found || forcing[*found].name != wanted.of) continue;
    const double u =
        std::hypot(peaks[of].frequency.u.value_or(line_u), wanted.harmonic * peaks[i].frequency.u.value_or(line_u));
    const double off = std::abs(peaks[of].frequency.value - wanted.harmonic * peaks[i].frequency.value);
    if (off <= std::max(resolution_hz, 3.0 * u)) return true;
  }
  return false;
}

}  // namespace

Cause cause_of_peak(const base::Estimate& frequency, double resolution_hz, std::span<const Forcing> forcing,
                    std::span<const modal::Mode> modes, bool in_background) {
  Cause cause;
  cause.mode = mode_at(frequency.value, modes);
  std::vector<Fit> found = fits(frequency, resolution_hz, forcing);
  const std::size_t best = put_best_first(found, resolution_hz);
  for (const Fit& fit : found) cause.candidates.push_back(fit.forcing);
  if (in_background) {
    cause.text = background;
    cause.from_background = true;
    cause.strength = base::Strength::fair;
  } else if (best > 1) {
    call_ambiguous(cause, std::span(found).first(best), forcing, resolution_hz);
  } else if (best == 1) {
    cause.forcing = found[0].forcing;
    cause.text = forcing[found[0].forcing].name;
    cause.strength = strength_of(found[0]);
  } else if (cause.mode) {
    const modal::Mode& mode = modes[*cause.mode];
    cause.text = fmt::format("natural frequency {:.4g} Hz", mode.frequency.value);
    cause.strength = base::Strength::fair;
  } else {
    cause.text = unexplained;
  }
  return cause;
}

std::vector<Cause> causes_of_peaks(std::span<const Peak> peaks, double resolution_hz, std::span<const Forcing> forcing,
                                   std::span<const modal::Mode> modes, std::span<const Peak> of_stopped_machine) {
  std::vector<Cause> out;
  for (const Peak& peak : peaks) {
    const bool in_background = stands_in_background(peak, of_stopped_machine, resolution_hz);
    out.push_back(cause_of_peak(peak.frequency, resolution_hz, forcing, modes, in_background));
  }
  for (std::size_t i = 0; i < peaks.size(); ++i) {
    if (out[i].forcing || out[i].ambiguous || out[i].from_background) continue;
    for (const std::size_t each : out[i].candidates) {
      if (forcing[each].harmonic < 2 || !confirmed(peaks, i, out, forcing, each, resolution_hz)) continue;
      out[i].forcing = each;
      out[i].text = forcing[each].name;
      out[i].strength = base::Strength::fair;
      break;
    }
  }
  return out;
}

bool stands_in_background(const Peak& peak, std::span<const Peak> of_stopped_machine, double resolution_hz,
                          double share) {
  const double line_u = resolution_hz / std::sqrt(12.0);
  return std::any_of(of_stopped_machine.begin(), of_stopped_machine.end(), [&](const Peak& each) {
    const double u = std::hypot(peak.frequency.u.value_or(line_u), each.frequency.u.value_or(line_u));
    return each.channel == peak.channel && each.amplitude >= share * peak.amplitude &&
           std::abs(each.frequency.value - peak.frequency.value) <= std::max(resolution_hz, 3.0 * u);
  });
}

}  // namespace stillmass::machine
