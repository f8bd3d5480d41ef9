#include "stillmass/absorber/minimax.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/numeric/root.hpp"

#include "absorber/response.hpp"

namespace stillmass::absorber {
namespace {

void check(const SizingProblem& problem) {
  const auto within = [](double x, double lo, double hi) { return lo <= x && x <= hi; };
  if (!within(problem.mass_ratio, 1e-4, 2.0)) throw base::usage_error("mass ratio", "must lie within 0.0001 and 2");
  if (!within(problem.machine_damping, 0.0, 0.3)) {
    throw base::usage_error("damping ratio of the machine", "must lie within 0 and 0.3");
  }
  if (!(problem.band.lo >= 0.0) || !(problem.band.lo <= problem.band.hi) || !(problem.least_damping > 0.0)) {
    throw base::usage_error("forcing band", "must be a range of positive frequencies");
  }
}

Response response_of(const SizingProblem& problem, double tuning, double damping) {
  return {Coupled(problem.mass_ratio, problem.machine_damping, tuning, damping), problem.forcing, problem.objective};
}

/// The classical optimum for an undamped machine, near which the search starts.
Sizing start_of(const SizingProblem& problem) {
  const bool velocity = problem.objective == Objective::velocity;
  const double whole = 1.0 + problem.mass_ratio;
  double exponent = 1.0;
  switch (problem.forcing) {
    case Forcing::constant:
    case Forcing::random:
      exponent = velocity ? -0.75 : -1.0;
      break;
    case Forcing::unbalance:
      exponent = velocity ? -0.25 : -0.5;
      break;
    case Forcing::base:
      exponent = -1.25;
      break;
  }
  const double damping = std::sqrt(0.375 * problem.mass_ratio / whole) + 0.13 * problem.machine_damping;
  return {std::pow(whole, exponent), damping, 0.0};
}

/// Two equal peaks; nothing where there are none.
std::optional<Sizing> equal_peaks(const SizingProblem& problem, std::array<double, 2>& peaks_at) {
  std::optional<std::array<double, 2>> hint;
  const auto peaks = [&](double tuning, double damping) -> std::optional<numeric::PeakPair> {
    const Response response = response_of(problem, tuning, damping);
    hint = two_peaks(response, hint);
    if (!hint) return {};
    const auto [low, high] = *hint;
    const auto by_low = response.sensitivity(low);
    const auto by_high = response.sensitivity(high);
    return numeric::PeakPair{std::log(response.value(low)), std::log(response.value(high)),
                             by_low.log_tuning / tuning,    by_low.log_damping / damping,
                             by_high.log_tuning / tuning,   by_high.log_damping / damping};
  };
  const Sizing start = start_of(problem);
  const auto found = numeric::minimax_of_two_peaks(peaks, start.tuning, {0.5 * start.tuning, 1.5 * start.tuning},
                                                   {0.6 * start.damping_ratio, 1.5 * start.damping_ratio}, 1e-9);
  if (!found || !hint) return {};
  peaks_at = *hint;
  return Sizing{found->x, found->y, std::exp(0.5 * found->height)};
}

/// The minimum of f over a logarithmic range: the best of `count` points, then Brent's method around it.
template <class F>
numeric::Minimum least(F f, base::Interval range, int count) {
  const double step = std::log(range.hi / range.lo) / (count - 1);
  int best = 0;
  double best_value = std::numeric_limits<double>::infinity();
  for (int i = 0; i < count; ++i) {
    if (const double value = f(range.lo * std::exp(step * i)); value < best_value) {
      best = i;
      best_value = value;
    }
  }
  const base::Interval near{range.lo * std::exp(step * std::max(best - 1, 0)),
                            range.lo * std::exp(step * std::min(best + 1, count - 1))};
  return numeric::minimum(f, near, 1e-7 * near.hi);
}

/// The least cost over tuning within damping, for any cost.
template <class Cost>
Sizing nested(const SizingProblem& problem, base::Interval tunings, Cost cost) {
  const Sizing start = start_of(problem);
  const auto best_tuning = [&](double damping) {
    return least([&](double t) { return cost(t, damping); }, tunings, 24);
  };
  const auto over_damping = [&](double damping) { return best_tuning(damping).value; };
  const base::Interval dampings{problem.least_damping,
                                std::max(3.0 * start.damping_ratio, 2.0 * problem.least_damping)};
  const auto found = least(over_damping, dampings, 16);
  return {best_tuning(found.at).at, found.at, found.value};
}

double white_cost(const SizingProblem& problem, double tuning, double damping) {
  const auto white = white_response(Coupled(problem.mass_ratio, problem.machine_damping, tuning, damping));
  return problem.objective == Objective::velocity ? white.velocity : white.displacement;
}

base::Interval squared(base::Interval band) { return {band.lo * band.lo, band.hi * band.hi}; }

/// The range over which the maximum counts where there are not two peaks.
base::Interval counted(const SizingProblem& problem) {
  const base::Interval band = squared(problem.band);
  return {band.lo > 0.0 ? band.lo : std::min(0.16, band.hi),
          std::isfinite(band.hi) ? band.hi : std::max(2.56, band.lo)};
}

/// Whether the two peaks lie in the band and nothing at its ends is higher.
bool leads_in_band(const SizingProblem& problem, const Sizing& sizing, const std::array<double, 2>& peaks_at) {
  const base::Interval band = squared(problem.band);
  const Response response = response_of(problem, sizing.tuning, sizing.damping_ratio);
  const double height = sizing.height * sizing.height * (1.0 + 1e-9);
  return band.contains(peaks_at[0]) && band.contains(peaks_at[1]) &&
         (band.lo == 0.0 || response.value(band.lo) <= height) &&
         (!std::isfinite(band.hi) || response.value(band.hi) <= height);
}

double banded_cost(const SizingProblem& problem, double tuning, double damping) {
  return std::sqrt(greatest(response_of(problem, tuning, damping), counted(problem)));
}

}  // namespace

Sizing minimax(const SizingProblem& problem) {
  check(problem);
  if (problem.forcing == Forcing::random) {
    return nested(problem, {0.4, 1.6}, [&](double t, double z) { return white_cost(problem, t, z); });
  }
  std::array<double, 2> peaks_at{};
  const auto free = equal_peaks(problem, peaks_at);
  if (free && free->damping_ratio >= problem.least_damping && leads_in_band(problem, *free, peaks_at)) return *free;
  const double lo = problem.band.lo > 0.0 ? std::min(0.4, 0.7 * problem.band.lo) : 0.4;
  const double hi = std::isfinite(problem.band.hi) ? std::max(1.6, 1.3 * problem.band.hi) : 1.6;
  return nested(problem, {lo, hi}, [&](double t, double z) { return banded_cost(problem, t, z); });
}

std::vector<Sizing> minimax_each(std::span<const SizingProblem> problems, const base::Context& context) {
  std::vector<Sizing> all;
  all.reserve(problems.size());
  base::for_ranges(
      context, problems.size(), 32,
      [&](std::size_t begin, std::size_t end) {
        std::vector<Sizing> part;
        for (std::size_t i = begin; i < end; ++i) part.push_back(minimax(problems[i]));
        return part;
      },
      [&](const std::vector<Sizing>& part) { all.insert(all.end(), part.begin(), part.end()); });
  return all;
}

double worst(const SizingProblem& problem, double tuning, double damping_ratio) {
  check(problem);
  return problem.forcing == Forcing::random ? white_cost(problem, tuning, damping_ratio)
                                            : banded_cost(problem, tuning, damping_ratio);
}

}  // namespace stillmass::absorber
