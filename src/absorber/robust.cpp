#include "stillmass/absorber/robust.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <optional>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"

#include "absorber/response.hpp"

namespace stillmass::absorber {

Tuned least_cost(const std::function<double(double, double)>& cost, Tuned start, double tuning_step,
                 double damping_step, double resolution, double least_damping) {
  Tuned best = start;
  best.cost = cost(best.tuning, best.damping_ratio);
  double scale = 1.0;
  while (scale * tuning_step >= resolution) {
    const double along = std::exp(scale * tuning_step);
    const double across = std::exp(scale * damping_step);
    const std::array<std::array<double, 2>, 4> moves{
        {{along, 1.0}, {1.0 / along, 1.0}, {1.0, across}, {1.0, 1.0 / across}}};
    bool moved = false;
    for (const auto& move : moves) {
      Tuned next{best.tuning * move[0], std::max(least_damping, best.damping_ratio * move[1]), 0.0};
      next.cost = cost(next.tuning, next.damping_ratio);
      if (next.cost < best.cost) {
        best = next;
        moved = true;
        break;
      }
    }
    if (!moved) scale *= 0.5;
  }
  return best;
}

Tuned robust(std::span<const MachineCase> cases, Forcing forcing, Objective objective, double probability,
             const base::Context& context) {
  if (cases.empty() || !(probability > 0.0 && probability <= 1.0) || forcing == Forcing::random) {
    throw base::usage_error("robust sizing", "needs cases, a probability and a forcing that is not random");
  }
  std::vector<double> heights(cases.size());
  std::vector<std::optional<std::array<double, 2>>> hints(cases.size());
  const auto height = [&](std::size_t i, double tuning, double damping) {
    const MachineCase& machine = cases[i];
    const Response response(Coupled(machine.mass_ratio, machine.machine_damping, tuning / machine.frequency, damping),
                            forcing, objective);
    const auto peaks = two_peaks(response, hints[i]);
    if (!peaks) return greatest(response, resonant_range(response));
    hints[i] = peaks;
    return std::max(response.value((*peaks)[0]), response.value((*peaks)[1]));
  };
  constexpr std::size_t grain = 1024;  // a case takes 0.1 us: fewer are not worth a thread
  const auto cost = [&](double tuning, double damping) {
    base::for_ranges(
        context, cases.size(), grain,
        [&](std::size_t begin, std::size_t end) {
          for (std::size_t i = begin; i < end; ++i) heights[i] = height(i, tuning, damping);
          return true;
        },
        [](bool) {});
    auto sorted = heights;
    const auto rank = static_cast<std::size_t>(std::ceil(probability * static_cast<double>(sorted.size()))) - 1;
    std::nth_element(sorted.begin(), sorted.begin() + static_cast<std::ptrdiff_t>(rank), sorted.end());
    return std::sqrt(sorted[rank]);
  };

  SizingProblem middle;
  middle.forcing = forcing;
  middle.objective = objective;
  for (const MachineCase& machine : cases) {
    middle.mass_ratio += machine.mass_ratio / static_cast<double>(cases.size());
    middle.machine_damping += machine.machine_damping / static_cast<double>(cases.size());
  }
  const Sizing start = minimax(middle);
  const Coupled at_start(middle.mass_ratio, middle.machine_damping, start.tuning, start.damping_ratio);
  hints.assign(cases.size(), two_peaks(Response(at_start, forcing, objective), {}));
  return least_cost(cost, {start.tuning, start.damping_ratio, 0.0}, 0.02, 0.2, 5e-4, middle.least_damping);
}

}  // namespace stillmass::absorber
