#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/absorber/forcing.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/modal/attached.hpp"
#include "stillmass/numeric/monte_carlo.hpp"

namespace stillmass::absorber {

/// Velocity of a point before the absorber, one-sided spectral density, line k at k * line_hz, (m/s)^2/Hz.
struct VelocitySpectrum {
  double line_hz = 0.0;
  std::vector<double> density;
};

/// What was measured at a point and direction before the absorber, in m/s r.m.s.; whatever is absent is taken from the
/// rest. With the component or the broad-band value alone, that is all the vibration there is.
struct Before {
  std::string point;
  std::optional<base::Estimate> overall;    ///< broad-band velocity in `band_hz`
  std::optional<base::Estimate> component;  ///< the forcing line alone, at the duty frequency
  std::optional<VelocitySpectrum> spectrum;
  base::Interval band_hz{10.0, 1000.0};  ///< of the broad-band value

  bool measured() const { return overall || component || spectrum; }
};

/// How far the built and fitted absorber may be from its drawing, and what stands in for uncertainties nobody stated.
/// All common practice of the trade unless said.
struct Allowances {
  double tuning_u = 0.003;         ///< relative, of the absorber's frequency after tuning on the machine
  double own_damping = 0.004;      ///< damping ratio of a steel spring absorber without a damper
  double own_damping_u = 0.3;      ///< relative
  double damper_u = 0.15;          ///< relative, of a damper's constant
  double modulus_per_k = -2.5e-4;  ///< relative change of a steel spring's modulus (EN 13906-1, from memory)
  double damper_per_k = -0.015;    ///< relative change of a silicone oil's viscosity (from memory)
  std::optional<base::Interval> temperature_c;  ///< absent: no drift is counted
  double tuned_at_c = 20.0;                     ///< moved into the range where it lies outside
  double mode_frequency_u = 0.005;              ///< relative, where the mode states none
  double mode_damping_u = 0.2;                  ///< relative, where the mode states none
  double modal_mass_u = 0.1;                    ///< relative, where the mode states none
  double velocity_u = 0.02;                     ///< relative, of measured velocities that state none
  double split_margin = 0.05;                   ///< relative distance of the split frequencies from the forcing range
};

/// The vibration with an absorber. Velocities in m/s r.m.s.; an estimate's value is the median of the uncertain cases,
/// its u their standard deviation.
struct Predicted {
  std::string point;
  base::Interval band_hz;
  base::Estimate before;                           ///< broad-band, as measured
  base::Estimate after;                            ///< broad-band, worst over the forcing range
  std::optional<base::Estimate> component_before;  ///< the forcing line alone; absent for random forcing
  std::optional<base::Estimate> component_after;   ///< worst over the forcing range
  base::Estimate at_duty;                          ///< broad-band, at the duty frequency
  double worst_case = 0.0;                         ///< 95th percentile of `after`
  std::optional<double> probability_meets_target;  ///< fraction of the cases; absent without a target
  double outside_model = 0.0;                      ///< what no absorber on this mode changes (other lines, other modes)
  base::Estimate travel_m;                         ///< peak, worst over the forcing range, plus three sigma of noise
  double travel_worst_m = 0.0;                     ///< its 95th percentile
  double split_clearance = 0.0;                    ///< 5th percentile of the least relative distance between a split
                                                   ///< frequency and the forcing range; 0 where one lies inside
};

/// Everything a prediction needs to know except the absorber.
struct PredictionInput {
  modal::Mode mode;  ///< with a modal mass
  ForcingRange forcing;
  Before before;
  Allowances allowances;
  bool damped = true;  ///< whether the absorber has a damper (which allowances apply)
  std::size_t cases = 1000;
  std::uint64_t seed = 1;
};

/// Predicts what absorbers of one kind on one mode leave at one point. The cases are drawn once, so that absorbers are
/// compared on the same machines.
///
/// The forcing line: in each case the force follows from the velocity before at the duty frequency and that case's
/// mode; over the forcing range it changes as `Forcing` says, and the worst frequency counts. The rest of the spectrum
/// within 0.7 to 1.4 times the natural frequency is taken for response of this mode and multiplied line by line by
/// |x with / x without|^2; the noise under the forcing line is read from its neighbours. All else is carried over.
/// Limits: one mode; what the ground or other modes contribute near the natural frequency is counted as this mode's.
class Prediction {
 public:
  /// Throws `Error` (usage): no modal mass, nothing measured before, values out of range.
  Prediction(const PredictionInput& input, const base::Context& context);
  ~Prediction();
  Prediction(Prediction&&) noexcept;

  Predicted of(const modal::SprungMass& absorber, std::optional<double> target, const base::Context& context) const;
  /// The `probability` quantile of the broad-band velocity after, worst over the forcing range, m/s r.m.s.
  double quantile(const modal::SprungMass& absorber, double probability, const base::Context& context) const;
  /// Which uncertain input spreads `after`, the strongest first.
  std::vector<numeric::Driver> drivers(const modal::SprungMass& absorber, const base::Context& context) const;
  /// What stays whatever the absorber does, m/s r.m.s.
  double outside_model() const;
  base::Estimate before() const;
  std::optional<base::Estimate> component_before() const;

 private:
  struct State;
  std::unique_ptr<const State> state_;
};

}  // namespace stillmass::absorber
