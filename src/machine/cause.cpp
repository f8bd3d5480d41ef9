#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/machine/forcing.hpp"

namespace stillmass::machine {
namespace {

constexpr double loose = 0.01;  // 3 u above this share of the frequency: a loose fit

struct Fit {
  std::size_t forcing = 0;
  double distance = 0.0;
  double spread = 0.0;  // 3 u
};

// The forcing frequencies that the peak may be; loose ones only where no tight one is there.
std::vector<Fit> fits(const base::Estimate& peak, double resolution_hz, std::span<const Forcing> forcing) {
  const double tight = std::max(resolution_hz, loose * peak.value);
  const double peak_u = peak.u.value_or(resolution_hz / std::sqrt(12.0));
  std::vector<Fit> out;
  for (std::size_t i = 0; i < forcing.size(); ++i) {
    Fit fit{i, std::abs(peak.value - forcing[i].frequency.value),
            3.0 * std::hypot(peak_u, forcing[i].frequency.u.value_or(0.0))};
    if (fit.distance <= std::max(resolution_hz, fit.spread)) out.push_back(fit);
  }
  const bool any_tight = std::any_of(out.begin(), out.end(), [&](const Fit& fit) { return fit.spread <= tight; });
  if (any_tight) std::erase_if(out, [&](const Fit& fit) { return fit.spread > tight; });
  std::stable_sort(out.begin(), out.end(), [](const Fit& a, const Fit& b) { return a.distance < b.distance; });
  return out;
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

}  // namespace

Cause cause_of_peak(const base::Estimate& frequency, double resolution_hz, std::span<const Forcing> forcing,
                    std::span<const modal::Mode> modes) {
  Cause cause;
  cause.mode = mode_at(frequency.value, modes);
  const std::vector<Fit> found = fits(frequency, resolution_hz, forcing);
  for (const Fit& fit : found) cause.candidates.push_back(fit.forcing);
  if (found.size() > 1) {
    cause.ambiguous = true;
    for (const Fit& fit : found) cause.text += (cause.text.empty() ? "" : " or ") + forcing[fit.forcing].name;
    const double apart =
        std::abs(forcing[found[0].forcing].frequency.value - forcing[found[1].forcing].frequency.value);
    cause.text += fmt::format(" (not separated: {:.2g} Hz apart, lines {:.2g} Hz)", apart, resolution_hz);
  } else if (found.size() == 1) {
    cause.forcing = found[0].forcing;
    cause.text = forcing[found[0].forcing].name;
    cause.strength = found[0].spread <= std::max(resolution_hz, loose * frequency.value) ? base::Strength::strong
                                                                                         : base::Strength::fair;
  } else if (cause.mode) {
    const modal::Mode& mode = modes[*cause.mode];
    cause.text = fmt::format("natural frequency {:.4g} Hz", mode.frequency.value);
    cause.strength = base::Strength::fair;
  } else {
    cause.text = "unknown";
  }
  return cause;
}

}  // namespace stillmass::machine
