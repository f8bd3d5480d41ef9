#include "stillmass/absorber/specification.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"

namespace stillmass::absorber {
namespace {

AbsorberData data_of(const modal::OneMode& machine, const modal::SprungMass& absorber) {
  AbsorberData data;
  data.mass_kg = absorber.mass_kg;
  data.mass_ratio = absorber.mass_kg / machine.modal_mass_kg;
  data.frequency_hz = absorber.frequency_hz;
  data.stiffness = absorber.stiffness();
  data.damping_ratio = absorber.damping_ratio;
  data.damping_constant = absorber.damping_constant();
  data.split_frequencies_hz = modal::split_frequencies(machine, absorber);
  return data;
}

/// Springs, blades, damper and tuning chart for the design travel.
void add_hardware(Specification& specification, const Request& request, const modal::SprungMass& absorber,
                  bool damped) {
  std::optional<double> travel_m;
  if (specification.predicted) {
    travel_m = specification.predicted->travel_worst_m;
  } else {
    travel_m = request.constraints.max_travel_m;
  }
  if (!travel_m || !(*travel_m > 0.0)) return;
  specification.blades = blade_options(absorber, *travel_m, request.stock, request.endurance_factor);
  specification.springs = spring_options(absorber, *travel_m, request.stock, request.endurance_factor);
  if (damped) specification.damper = damper_duty(absorber, *travel_m, absorber.frequency_hz);
  if (!specification.blades.empty()) {
    const BladeOption& first = specification.blades.front();
    specification.tuning = tuning_chart(first.blade, first.tip_mass_kg);
  }
}

void check(const Request& request) {
  const auto positive = [](const std::optional<double>& value, const char* what) {
    if (value && !(*value > 0.0 && std::isfinite(*value))) throw base::usage_error(what, "must be positive");
  };
  positive(request.mode.frequency.value, "natural frequency");
  positive(request.mode.damping_ratio.value, "damping ratio");
  if (request.mode.modal_mass) positive(request.mode.modal_mass->value, "modal mass");
  positive(request.forcing.range_hz.lo, "forcing frequency");
  positive(request.forcing.range_hz.hi, "forcing frequency");
  positive(request.forcing.duty_hz, "duty frequency");
  positive(request.sweep_hz_per_s, "sweep rate");
  if (request.forcing.range_hz.lo > request.forcing.range_hz.hi) {
    throw base::usage_error("forcing frequency", "must be a range LO:HI");
  }
  const Constraints& constraints = request.constraints;
  positive(constraints.target, "target");
  positive(constraints.max_mass_kg, "greatest mass");
  positive(constraints.max_travel_m, "greatest travel");
  if (!(constraints.certainty > 0.0 && constraints.certainty < 1.0)) {
    throw base::usage_error("certainty", "must lie between 0 and 1");
  }
}

}  // namespace

base::Answer<Specification> specify(const Request& request, const base::Context& context) {
  check(request);
  const auto machine = modal::plain(request.mode);
  if (!machine) {
    return base::Refusal{"modal-mass-unknown", "the mode has a frequency and a damping, but no modal mass",
                         "hit the attachment point with a force hammer, or repeat the bump test with a known mass "
                         "bolted on"};
  }
  PredictionInput input{request.mode, request.forcing, request.before, request.allowances,
                        true,         request.cases,   request.seed};
  context.report("sizing the absorber", 0.0);
  const Decision decision = decide(input, request.constraints, request.objective, context);
  input.damped = decision.damped;

  Specification specification;
  specification.recommendation = decision.recommendation;
  specification.reason = decision.reason;
  specification.notes = decision.notes;
  specification.predicted = decision.predicted;
  specification.frequency_per_kelvin = frequency_per_kelvin(request.allowances.modulus_per_k);
  const AbsorberData data = data_of(*machine, decision.absorber);
  const bool recommended = decision.recommendation != Recommendation::none;
  (recommended ? specification.absorber : specification.best_possible) = data;
  if (recommended) add_hardware(specification, request, decision.absorber, decision.damped);

  for (const Before& other : request.others) {
    if (!other.measured()) continue;
    PredictionInput there = input;
    there.before = other;
    specification.others.push_back(
        Prediction(there, context).of(decision.absorber, request.constraints.target, context));
  }
  if (decision.predicted) {
    specification.drivers = Prediction(input, context).drivers(decision.absorber, context);
    const auto& line = decision.predicted->component_before;
    if (line && recommended) {
      specification.passing =
          passing_travel(*machine, decision.absorber, request.forcing, line->value, request.sweep_hz_per_s);
    }
    if (line && request.constraints.target) {
      const double rest = decision.predicted->outside_model / *request.constraints.target;
      if (rest < 1.0) {
        specification.remedies = remedies(*machine, request.forcing, line->value,
                                          *request.constraints.target * std::sqrt(1.0 - rest * rest));
      }
    }
  }
  context.report("sizing the absorber", 1.0);
  return specification;
}

}  // namespace stillmass::absorber
