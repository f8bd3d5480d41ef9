#include "absorber/kind.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/absorber/minimax.hpp"
#include "stillmass/absorber/robust.hpp"

namespace stillmass::absorber {
namespace {

constexpr double least_damped_ratio = 0.02;  // below it a damper is not worth its name (common practice)

PredictionInput of_kind(PredictionInput input, bool damped) {
  input.damped = damped;
  return input;
}

/// The least number of two significant digits at or above x: masses that a workshop cuts.
double two_digits_up(double x) {
  const double digit = std::pow(10.0, std::floor(std::log10(x)) - 1.0);
  return std::ceil(x / digit - 1e-9) * digit;
}

}  // namespace

Kind::Kind(const PredictionInput& input, bool damped, const Constraints& constraints, Objective objective,
           const base::Context& context)
    : input_(of_kind(input, damped)),
      constraints_(constraints),
      objective_(objective),
      machine_(modal::plain(input.mode).value()),
      context_(context) {
  if (input.before.measured()) prediction_.emplace(input_, context);
}

Candidate Kind::at(double mass_kg, bool settled) const {
  Candidate candidate{nominal(mass_kg), {}};
  if (!prediction_) return candidate;
  if (input_.damped && settled) {
    if (objective_ == Objective::velocity) settle(candidate.absorber);
    keep_travel(candidate.absorber);
  }
  candidate.predicted = prediction_->of(candidate.absorber, constraints_.target, context_);
  return candidate;
}

Candidate Kind::lightest(double max_mass_kg) const {
  double light = std::max(1e-3 * max_mass_kg, 2e-4 * machine_.modal_mass_kg);
  double heavy = max_mass_kg;
  while (heavy > 1.02 * light) {
    const double middle = std::sqrt(light * heavy);
    (suits(at(middle, false)) ? heavy : light) = middle;
  }
  const auto chosen = at(std::min(two_digits_up(heavy), max_mass_kg), true);
  return suits(chosen) ? chosen : at(max_mass_kg, true);
}

bool Kind::meets_target(const Candidate& candidate) const {
  return candidate.predicted->probability_meets_target.value_or(0.0) >= constraints_.certainty;
}

bool Kind::keeps_travel(const Candidate& candidate) const {
  return !constraints_.max_travel_m || candidate.predicted->travel_worst_m <= *constraints_.max_travel_m;
}

bool Kind::clear_of_splits(const Candidate& candidate) const {
  return input_.damped || candidate.predicted->split_clearance >= input_.allowances.split_margin;
}

modal::SprungMass Kind::nominal(double mass_kg) const {
  const base::Interval range = input_.forcing.range_hz;
  if (!input_.damped) return {mass_kg, range.middle(), input_.allowances.own_damping};
  SizingProblem problem;
  problem.mass_ratio = std::clamp(mass_kg / machine_.modal_mass_kg, 1e-4, greatest_mass_ratio);
  problem.machine_damping = std::min(machine_.damping_ratio, 0.3);
  problem.forcing = input_.forcing.forcing;
  problem.objective = objective_;
  problem.band = {range.lo / machine_.frequency_hz, range.hi / machine_.frequency_hz};
  problem.least_damping = least_damped_ratio;
  const Sizing sizing = minimax(problem);
  return {mass_kg, sizing.tuning * machine_.frequency_hz, sizing.damping_ratio};
}

void Kind::settle(modal::SprungMass& absorber) const {
  const auto cost = [&](double frequency, double damping) {
    return prediction_->quantile({absorber.mass_kg, frequency, damping}, constraints_.certainty, context_);
  };
  const Tuned best =
      least_cost(cost, {absorber.frequency_hz, absorber.damping_ratio, 0.0}, 0.01, 0.15, 1e-3, least_damped_ratio);
  absorber.frequency_hz = best.tuning;
  absorber.damping_ratio = best.damping_ratio;
}

/// More damping than the optimum, up to fourfold, where the travel would be too long.
void Kind::keep_travel(modal::SprungMass& absorber) const {
  if (!constraints_.max_travel_m) return;
  modal::SprungMass tried = absorber;
  for (int step = 0; step < 8; ++step) {
    if (prediction_->of(tried, {}, context_).travel_worst_m <= *constraints_.max_travel_m) {
      absorber = tried;
      return;
    }
    tried.damping_ratio *= 1.2;
  }
}

}  // namespace stillmass::absorber
