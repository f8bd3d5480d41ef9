#pragma once

#include <array>

#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// A machine's mode with an absorber on it, in ratios. All functions take s = (f / f1)^2 >= 0 and give squared
/// magnitudes, as ratios of polynomials in s:
///   N = (t - s)^2 + s (2 za r)^2                                     r = fa/f1, t = r^2, za absorber's damping ratio
///   D = [(1-s)(t-s) - mu t s - 4 z1 za r s]^2 + s [2 za r (1 - (1+mu) s) + 2 z1 (t - s)]^2
///   B = (1-s)^2 + 4 z1^2 s                                           the bare machine
/// Force F acts at the attachment point, k is the mode's stiffness.
class Coupled {
 public:
  /// mass_ratio > 0, machine_damping >= 0, tuning fa/f1 > 0, absorber_damping >= 0 (at its own frequency).
  Coupled(double mass_ratio, double machine_damping, double tuning, double absorber_damping)
      : mass_ratio_(mass_ratio),
        machine_damping_(machine_damping),
        tuning2_(tuning * tuning),
        coupling_(2.0 * absorber_damping * tuning) {}
  Coupled(const modal::OneMode& machine, const modal::SprungMass& absorber)
      : Coupled(absorber.mass_kg / machine.modal_mass_kg, machine.damping_ratio,
                absorber.frequency_hz / machine.frequency_hz, absorber.damping_ratio) {}

  double numerator(double s) const {
    const double a = tuning2_ - s;
    return a * a + s * coupling_ * coupling_;
  }
  double denominator(double s) const {
    const double real =
        (1.0 - s) * (tuning2_ - s) - mass_ratio_ * tuning2_ * s - 2.0 * machine_damping_ * coupling_ * s;
    const double imaginary = coupling_ * (1.0 - (1.0 + mass_ratio_) * s) + 2.0 * machine_damping_ * (tuning2_ - s);
    return real * real + s * imaginary * imaginary;
  }
  double bare(double s) const { return (1.0 - s) * (1.0 - s) + 4.0 * machine_damping_ * machine_damping_ * s; }

  /// |x k / F|^2 with the absorber: N / D.
  double displacement(double s) const { return numerator(s) / denominator(s); }
  /// |x with / x without|^2: N B / D. The same for every kind of forcing.
  double ratio(double s) const { return numerator(s) * bare(s) / denominator(s); }
  /// |absorber's motion relative to the machine, times k / F|^2: s^2 / D.
  double travel(double s) const { return s * s / denominator(s); }

  double mass_ratio() const { return mass_ratio_; }
  double machine_damping() const { return machine_damping_; }
  double tuning2() const { return tuning2_; }
  double coupling() const { return coupling_; }  ///< 2 za r

  /// The values of s at which the pair without damping is resonant, lower first.
  std::array<double, 2> splits() const;

 private:
  double mass_ratio_;
  double machine_damping_;
  double tuning2_;
  double coupling_;
};

/// Mean square of the response to a white force, as (1/2 pi) times the integral of |response|^2 over f/f1 from minus
/// to plus infinity (Warburton's normalisation). Throws nothing; infinite without any damping.
struct WhiteResponse {
  double displacement = 0.0;  ///< of x k / F
  double velocity = 0.0;      ///< of x k / F times f/f1
  double travel = 0.0;        ///< of the absorber's relative motion times k / F
};
WhiteResponse white_response(const Coupled& pair);
/// Of the bare machine: displacement and velocity are both 1 / (4 z1); travel 0.
WhiteResponse white_response(double machine_damping);

}  // namespace stillmass::absorber
