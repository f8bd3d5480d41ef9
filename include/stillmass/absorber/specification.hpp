#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/absorber/blade.hpp"
#include "stillmass/absorber/damper.hpp"
#include "stillmass/absorber/decision.hpp"
#include "stillmass/absorber/prediction.hpp"
#include "stillmass/absorber/remedies.hpp"
#include "stillmass/absorber/spring.hpp"
#include "stillmass/absorber/transient.hpp"
#include "stillmass/absorber/tuning.hpp"
#include "stillmass/base/answer.hpp"

namespace stillmass::absorber {

/// The whole question: a mode, what shakes it, what was measured, what is allowed.
struct Request {
  modal::Mode mode;  ///< at the attachment point, in the machine's running state
  ForcingRange forcing;
  Objective objective = Objective::velocity;
  Before before;               ///< at the point that is judged; all of it may be absent
  std::vector<Before> others;  ///< other points, for the record
  Constraints constraints;
  Allowances allowances;
  std::optional<double> sweep_hz_per_s;  ///< of the forcing frequency at start or stop
  Stock stock;                           ///< may be empty: no hardware options then
  double endurance_factor = 1.5;
  std::size_t cases = 1000;
  std::uint64_t seed = 1;
};

/// The absorber as numbers for the drawing: mass, frequency, stiffness and damping agree with each other.
struct AbsorberData {
  double mass_kg = 0.0;
  double mass_ratio = 0.0;
  double frequency_hz = 0.0;
  double stiffness = 0.0;  ///< N/m
  double damping_ratio = 0.0;
  double damping_constant = 0.0;  ///< N s/m
  std::array<double, 2> split_frequencies_hz{};
};

struct Specification {
  Recommendation recommendation = Recommendation::none;
  Reason reason;
  std::vector<Reason> notes;
  std::optional<AbsorberData> absorber;       ///< absent for `none`
  std::optional<AbsorberData> best_possible;  ///< for `none`: what `predicted` was made with
  std::optional<Predicted> predicted;         ///< absent where nothing was measured before
  std::vector<Predicted> others;
  std::vector<BladeOption> blades;
  std::vector<SpringOption> springs;
  std::optional<DamperDuty> damper;      ///< damped only
  std::vector<TuningPoint> tuning;       ///< of the first blade option
  double frequency_per_kelvin = 0.0;     ///< relative
  std::optional<PassingTravel> passing;  ///< forcing line only
  std::vector<Remedy> remedies;          ///< forcing line only
  std::vector<numeric::Driver> drivers;  ///< what spreads `after`
};

/// From the question to the specification. Refuses (`modal-mass-unknown`) where the mode has no modal mass. Throws
/// `Error` (usage) for values out of range.
base::Answer<Specification> specify(const Request& request, const base::Context& context);

}  // namespace stillmass::absorber
