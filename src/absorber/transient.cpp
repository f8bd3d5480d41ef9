#include "stillmass/absorber/transient.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

#include "absorber/response.hpp"

namespace stillmass::absorber {

PassingTravel passing_travel(const modal::OneMode& machine, const modal::SprungMass& absorber,
                             const ForcingRange& forcing, double line_rms, std::optional<double> sweep_hz_per_s) {
  if (forcing.forcing == Forcing::random) throw base::usage_error("start and stop", "need a forcing frequency");
  const Coupled pair(machine, absorber);
  const double z1 = machine.damping_ratio;
  const double f1 = machine.frequency_hz;
  const double s = pair.splits()[0];
  const double duty = forcing.duty() / f1;
  const double w = 2.0 * std::numbers::pi * f1 * std::sqrt(s);
  // Velocity^2 of the bare machine at the split, with its resonance left out: the force alone.
  const double force =
      line_rms * line_rms * velocity_weight(z1, forcing.forcing, s) / bare_velocity(z1, forcing.forcing, duty * duty);
  PassingTravel passing;
  passing.split_hz = f1 * std::sqrt(s);
  passing.steady_m = std::sqrt(2.0 * force * pair.travel(s)) / w;
  if (sweep_hz_per_s) {
    if (!(*sweep_hz_per_s > 0.0)) throw base::usage_error("sweep rate", "must be positive");
    const auto split = modal::damped_splits(machine, absorber)[0];
    const double bandwidth = 2.0 * split.damping_ratio * split.frequency_hz;
    const double eta = *sweep_hz_per_s / (bandwidth * bandwidth);
    passing.passing_m = passing.steady_m * (1.0 - std::exp(-2.86 * std::pow(eta, -0.445)));
  }
  return passing;
}

}  // namespace stillmass::absorber
