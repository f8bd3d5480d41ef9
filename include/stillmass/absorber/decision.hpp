#pragma once

#include <optional>
#include <string_view>
#include <vector>

#include "stillmass/absorber/prediction.hpp"
#include "stillmass/base/unit.hpp"

namespace stillmass::absorber {

enum class Recommendation { damped, undamped, none };
std::string_view name(Recommendation recommendation);

/// Why, and what to know besides. The first block explains a recommendation, the second qualifies it.
enum class ReasonCode {
  one_forcing_frequency,   ///< undamped: the forcing range and all drift fit between the split frequencies
  forcing_band,            ///< damped: the forcing range is too wide for an undamped absorber
  random_forcing,          ///< damped: the forcing has no line
  undamped_misses_target,  ///< damped: the range is narrow, yet the undamped absorber misses the target and this not
  target_already_met,      ///< none
  outside_model_exceeds_target,  ///< none: other lines and modes alone are above the target
  mass_too_small,                ///< none: the greatest mass allowed does not bridge half of the way to the target
  travel_exceeds_limit,          ///< none: no absorber within the mass bound keeps its travel within the limit

  target_not_certain,        ///< fewer than 95 % of the cases meet the target, with the greatest mass allowed
  split_near_forcing,        ///< a split frequency is closer to the forcing range than the margin
  mode_uncertainty_assumed,  ///< the mode stated no uncertainty for something; the common default was used
  mass_bound_assumed,        ///< no mass bound was given; a fifth of the modal mass was taken
  temperature_unknown,       ///< no temperature range was given: drift is not in the prediction
  no_target,                 ///< no target or no velocity before: the greatest mass allowed was taken
};
std::string_view name(ReasonCode code);

/// One number of a reason, in SI.
struct Number {
  std::string_view name;  ///< "target", "after", "worst-case", "mass", "travel", "clearance", ...
  double value = 0.0;
  base::Quantity quantity = base::Quantity::ratio;
};

struct Reason {
  ReasonCode code = ReasonCode::one_forcing_frequency;
  std::vector<Number> numbers;
};

/// What bounds the choice.
struct Constraints {
  std::optional<double> target;        ///< broad-band velocity, m/s r.m.s.
  std::optional<double> max_mass_kg;   ///< absent: a fifth of the modal mass; counts up to twice of it
  std::optional<double> max_travel_m;  ///< peak
  double certainty = 0.95;             ///< fraction of the uncertain cases that must meet the target
};

/// The chosen absorber, or the best there is where none is recommended.
struct Decision {
  Recommendation recommendation = Recommendation::none;
  Reason reason;
  std::vector<Reason> notes;
  modal::SprungMass absorber;          ///< for `none`: the best within the bounds, for the record
  bool damped = false;                 ///< its kind
  std::optional<Predicted> predicted;  ///< with that absorber; absent where nothing was measured before
};

/// Undamped where one narrow forcing range fits between the splits of the absorber; damped for a band; none where the
/// target is met already, lies below what is outside the model, or is out of reach. Of absorbers that reach the target
/// in `certainty` of the cases, keep their travel and (undamped) keep the splits away from the forcing range by the
/// margin, the lightest; where none does, the heaviest allowed, with a note. An undamped absorber is tuned to the
/// middle of the forcing range, a damped one for the least maximum over it and then for the certain quantile of the
/// cases. `input.damped` is ignored: both kinds are tried. The mode needs a modal mass.
Decision decide(const PredictionInput& input, const Constraints& constraints, Objective objective,
                const base::Context& context);

}  // namespace stillmass::absorber
