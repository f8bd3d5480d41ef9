#include "stillmass/survey/plan.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/absorber/closed_forms.hpp"

namespace stillmass::survey {
namespace {

constexpr double severity_top_hz = 1000.0;
constexpr double rate_over_frequency = 2.56;  // room for the recorder's filter (common practice)
constexpr double steady_s = 60.0;
constexpr double light_damping = 0.005;
constexpr int blows = 8;
constexpr double reach_over_speed = 4.0;
// The spectrum of a half-sine of duration T has fallen by 10 dB at about 1.0 / T (its first zero is at 1.5 / T).
constexpr double contact_times_reach = 1.0;
constexpr double trial_share = 0.01;  // of the machine's mass: shifts a frequency by about half of that or more

}  // namespace

Plan measuring_plan(const Survey& survey) {
  const machine::Machine& machine = survey.machine;
  Plan plan;
  plan.highest_hz = severity_top_hz;
  plan.steady_s = steady_s;
  plan.hammer_blows = blows;
  if (machine.speed_hz) {
    const double speed = machine.speed_hz->hi;
    if (machine.vanes) plan.highest_hz = std::max(plan.highest_hz, 2.2 * *machine.vanes * speed);
    plan.hammer_s = std::log(100.0) / (light_damping * 2.0 * std::numbers::pi * 0.5 * machine.speed_hz->lo);
    plan.hammer_reach_hz = reach_over_speed * speed;
    plan.contact_s = contact_times_reach / *plan.hammer_reach_hz;
  } else {
    plan.unknown.emplace_back("machine.speed_rpm");
  }
  plan.rate_hz = rate_over_frequency * plan.highest_hz;
  if (machine.kind == machine::MachineKind::pump || machine.kind == machine::MachineKind::fan) {
    if (!machine.vanes) plan.unknown.emplace_back("machine.vanes");
  }
  if (!machine.mass_kg) plan.unknown.emplace_back("machine.mass_kg");
  if (survey.limits.empty()) plan.unknown.emplace_back("limit.target_mm_s");
  if (survey.absorbers.empty()) plan.unknown.emplace_back("absorber.point");
  if (machine.mass_kg) {
    plan.trial_mass_kg = trial_share * *machine.mass_kg;
    for (const AbsorberSite& site : survey.absorbers) {
      if (!site.max_mass_kg) continue;
      Plan::Bound bound;
      bound.point = site.point;
      bound.least_mass_ratio = *site.max_mass_kg / *machine.mass_kg;
      const auto splits = absorber::undamped_splits(bound.least_mass_ratio);
      bound.least_split = std::min(1.0 - splits[0], splits[1] - 1.0);
      bound.highest_peak = absorber::exact_constant(bound.least_mass_ratio).height;
      plan.bounds.push_back(bound);
    }
  }
  return plan;
}

}  // namespace stillmass::survey
