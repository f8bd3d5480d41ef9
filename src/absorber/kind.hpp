#pragma once

#include <optional>

#include "stillmass/absorber/decision.hpp"

namespace stillmass::absorber {

/// An absorber with what it leaves; the prediction is absent where nothing was measured before.
struct Candidate {
  modal::SprungMass absorber;
  std::optional<Predicted> predicted;
};

/// One kind of absorber, damped or undamped, at any mass.
class Kind {
 public:
  /// The mode needs a modal mass. `context` must outlive the object.
  Kind(const PredictionInput& input, bool damped, const Constraints& constraints, Objective objective,
       const base::Context& context);

  /// The absorber of that mass. `settled`: a damped one is settled on the uncertain cases and on the travel allowed,
  /// not on the nominal mode alone.
  Candidate at(double mass_kg, bool settled) const;
  /// The lightest absorber that suits, where the heaviest does; masses in two significant digits, rounded up.
  Candidate lightest(double max_mass_kg) const;

  // Of candidates with a prediction:
  bool meets_target(const Candidate& candidate) const;
  bool keeps_travel(const Candidate& candidate) const;
  bool clear_of_splits(const Candidate& candidate) const;
  bool suits(const Candidate& candidate) const {
    return meets_target(candidate) && keeps_travel(candidate) && clear_of_splits(candidate);
  }
  const std::optional<Prediction>& prediction() const { return prediction_; }

 private:
  modal::SprungMass nominal(double mass_kg) const;
  void settle(modal::SprungMass& absorber) const;
  void keep_travel(modal::SprungMass& absorber) const;

  PredictionInput input_;
  Constraints constraints_;
  Objective objective_;
  modal::OneMode machine_;
  const base::Context& context_;
  std::optional<Prediction> prediction_;
};

/// Beyond this mass ratio the sizing is not defined.
inline constexpr double greatest_mass_ratio = 2.0;

}  // namespace stillmass::absorber
