#include "stillmass/absorber/decision.hpp"

#include <algorithm>
#include <limits>

#include "stillmass/base/error.hpp"

#include "absorber/kind.hpp"

namespace stillmass::absorber {
namespace {

constexpr double assumed_mass_ratio = 0.2;     // where no mass bound is given (common practice)
constexpr double slip_of_a_motor = 0.05;       // a wider range is a variable speed (common practice)
constexpr double least_part_of_the_way = 0.5;  // from before to target, else the absorber is not worth fitting

Number velocity(std::string_view name, double value) { return {name, value, base::Quantity::velocity}; }
Number kilograms(double value) { return {"mass", value, base::Quantity::mass}; }
Number ratio(std::string_view name, double value) { return {name, value, base::Quantity::ratio}; }
Number displacement(std::string_view name, double value) { return {name, value, base::Quantity::displacement}; }

/// Least relative distance of a split frequency of the nominal pair from the forcing range; 0 inside.
double nominal_clearance(const modal::OneMode& machine, const modal::SprungMass& absorber, base::Interval range) {
  double least = std::numeric_limits<double>::infinity();
  for (const double split : modal::split_frequencies(machine, absorber)) {
    const double away = split < range.lo ? 1.0 - split / range.lo : std::max(0.0, split / range.hi - 1.0);
    least = std::min(least, away);
  }
  return least;
}

/// What had to be assumed for want of data.
std::vector<Reason> assumptions(const PredictionInput& input, const Constraints& constraints, double max_mass_kg) {
  std::vector<Reason> notes;
  const auto& mode = input.mode;
  if (!mode.frequency.u || !mode.damping_ratio.u || !mode.modal_mass->u) {
    notes.push_back({ReasonCode::mode_uncertainty_assumed, {}});
  }
  if (!constraints.max_mass_kg) notes.push_back({ReasonCode::mass_bound_assumed, {kilograms(max_mass_kg)}});
  if (!input.allowances.temperature_c) notes.push_back({ReasonCode::temperature_unknown, {}});
  return notes;
}

/// The greatest absorber of each kind that is allowed, and the choice between the kinds.
class Choice {
 public:
  Choice(const PredictionInput& input, const Constraints& constraints, Objective objective, double max_mass_kg,
         const base::Context& context)
      : input_(input),
        constraints_(constraints),
        max_mass_kg_(max_mass_kg),
        with_damper_(input, true, constraints, objective, context),
        without_(input, false, constraints, objective, context),
        damped_(with_damper_.at(max_mass_kg, true)),
        undamped_(without_.at(max_mass_kg, true)) {}

  /// Nothing to judge by: the kind follows from the forcing range, the mass from its bound.
  Decision by_range(const modal::OneMode& machine) const {
    const double clearance = nominal_clearance(machine, undamped_.absorber, input_.forcing.range_hz);
    const bool narrow = !random() && clearance >= input_.allowances.split_margin;
    const auto code =
        narrow ? ReasonCode::one_forcing_frequency : (random() ? ReasonCode::random_forcing : ReasonCode::forcing_band);
    Decision decision = made(!narrow, {code, {ratio("clearance", clearance)}}, narrow ? undamped_ : damped_);
    decision.notes.push_back({ReasonCode::no_target, {kilograms(max_mass_kg_)}});
    return decision;
  }

  Decision by_target(double target) const {
    const auto& prediction = *without_.prediction();
    const double before = prediction.before().value;
    if (before <= target) {
      return none(ReasonCode::target_already_met, {velocity("before", before), velocity("target", target)});
    }
    if (prediction.outside_model() > target) {
      return none(ReasonCode::outside_model_exceeds_target,
                  {velocity("outside-model", prediction.outside_model()), velocity("target", target)});
    }
    if (!random() && without_.suits(undamped_)) {
      const auto chosen = without_.lightest(max_mass_kg_);
      const auto clearance = ratio("clearance", chosen.predicted->split_clearance);
      return made(false, {ReasonCode::one_forcing_frequency, {clearance}}, chosen);
    }
    if (with_damper_.suits(damped_)) return made(true, why_damped(), with_damper_.lightest(max_mass_kg_));
    if (!without_.keeps_travel(undamped_) && !with_damper_.keeps_travel(damped_)) {
      const double least = std::min(undamped_.predicted->travel_worst_m, damped_.predicted->travel_worst_m);
      return none(ReasonCode::travel_exceeds_limit,
                  {displacement("travel", least), displacement("limit", *constraints_.max_travel_m)});
    }
    const double after = best().predicted->after.value;
    if (after > before - least_part_of_the_way * (before - target)) {
      return none(ReasonCode::mass_too_small,
                  {kilograms(max_mass_kg_), velocity("after", after), velocity("target", target)});
    }
    return best_effort();
  }

 private:
  bool random() const { return input_.forcing.forcing == Forcing::random; }

  bool prefers_undamped() const {
    if (random() || !without_.keeps_travel(undamped_)) return false;
    return !with_damper_.keeps_travel(damped_) || undamped_.predicted->worst_case <= damped_.predicted->worst_case;
  }
  const Candidate& best() const { return prefers_undamped() ? undamped_ : damped_; }

  Reason why_damped() const {
    const base::Interval& range = input_.forcing.range_hz;
    const double clearance = undamped_.predicted->split_clearance;
    const bool narrow = range.width() <= slip_of_a_motor * range.middle() && clearance > 0.0;
    const auto code = narrow ? ReasonCode::undamped_misses_target : ReasonCode::forcing_band;
    return {random() ? ReasonCode::random_forcing : code, {ratio("clearance", clearance)}};
  }

  static Decision made(bool damped, Reason reason, const Candidate& candidate) {
    const auto recommendation = damped ? Recommendation::damped : Recommendation::undamped;
    return {recommendation, std::move(reason), {}, candidate.absorber, damped, candidate.predicted};
  }

  Decision none(ReasonCode code, std::vector<Number> numbers) const {
    return {Recommendation::none, {code, std::move(numbers)}, {},
            best().absorber,      !prefers_undamped(),        best().predicted};
  }

  /// The greatest mass allowed, which misses something but is worth fitting.
  Decision best_effort() const {
    const Predicted& predicted = *best().predicted;
    const auto clearance = ratio("clearance", predicted.split_clearance);
    Decision decision = prefers_undamped() ? made(false, {ReasonCode::one_forcing_frequency, {clearance}}, undamped_)
                                           : made(true, why_damped(), damped_);
    const double probability = predicted.probability_meets_target.value_or(0.0);
    if (probability < constraints_.certainty) {
      decision.notes.push_back({ReasonCode::target_not_certain,
                                {ratio("probability", probability), velocity("worst-case", predicted.worst_case)}});
    }
    if (prefers_undamped() && !without_.clear_of_splits(undamped_)) {
      decision.notes.push_back({ReasonCode::split_near_forcing, {clearance}});
    }
    return decision;
  }

  const PredictionInput& input_;
  const Constraints& constraints_;
  double max_mass_kg_;
  Kind with_damper_;
  Kind without_;
  Candidate damped_;
  Candidate undamped_;
};

}  // namespace

std::string_view name(Recommendation recommendation) {
  switch (recommendation) {
    case Recommendation::damped:
      return "damped";
    case Recommendation::undamped:
      return "undamped";
    case Recommendation::none:
      return "none";
  }
  return {};
}

std::string_view name(ReasonCode code) {
  switch (code) {
    case ReasonCode::one_forcing_frequency:
      return "one-forcing-frequency";
    case ReasonCode::forcing_band:
      return "forcing-band";
    case ReasonCode::random_forcing:
      return "random-forcing";
    case ReasonCode::undamped_misses_target:
      return "undamped-misses-target";
    case ReasonCode::target_already_met:
      return "target-already-met";
    case ReasonCode::outside_model_exceeds_target:
      return "outside-model-exceeds-target";
    case ReasonCode::mass_too_small:
      return "mass-too-small";
    case ReasonCode::travel_exceeds_limit:
      return "travel-exceeds-limit";
    case ReasonCode::target_not_certain:
      return "target-not-certain";
    case ReasonCode::split_near_forcing:
      return "split-near-forcing";
    case ReasonCode::mode_uncertainty_assumed:
      return "mode-uncertainty-assumed";
    case ReasonCode::mass_bound_assumed:
      return "mass-bound-assumed";
    case ReasonCode::temperature_unknown:
      return "temperature-unknown";
    case ReasonCode::no_target:
      return "no-target";
  }
  return {};
}

Decision decide(const PredictionInput& input, const Constraints& constraints, Objective objective,
                const base::Context& context) {
  const auto machine = modal::plain(input.mode);
  if (!machine) throw base::usage_error("mode", "has no modal mass");
  if (constraints.max_mass_kg && !(*constraints.max_mass_kg > 0.0)) {
    throw base::usage_error("greatest mass", "must be positive");
  }
  const double whole = machine->modal_mass_kg;
  const double max_mass_kg = std::clamp(constraints.max_mass_kg.value_or(assumed_mass_ratio * whole), 1e-4 * whole,
                                        greatest_mass_ratio * whole);

  const Choice choice(input, constraints, objective, max_mass_kg, context);
  const bool judged = constraints.target && input.before.measured();
  Decision decision = judged ? choice.by_target(*constraints.target) : choice.by_range(*machine);
  const auto notes = assumptions(input, constraints, max_mass_kg);
  decision.notes.insert(decision.notes.end(), notes.begin(), notes.end());
  return decision;
}

}  // namespace stillmass::absorber
