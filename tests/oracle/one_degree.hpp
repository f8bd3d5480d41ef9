#pragma once

#include <complex>
#include <span>
#include <vector>

namespace stillmass::oracle {

// Closed forms of viscously damped modes, written from the equation of motion
//   m x'' + 2 z w m x' + w^2 m x = F(t),
// apart from the program's own formulas. Time factor e^{+i w t}; SI.

/// One mode of a driving point.
struct OneDegree {
  double frequency_hz;
  double damping_ratio;
  double mass_kg;

  double omega() const;  ///< rad/s, undamped
  double damped_omega() const;
  std::complex<double> pole() const;  ///< -z w + i w sqrt(1 - z^2)
};

std::complex<double> receptance(const OneDegree& mode, double f_hz);   ///< m/N
std::complex<double> mobility(const OneDegree& mode, double f_hz);     ///< (m/s)/N
std::complex<double> accelerance(const OneDegree& mode, double f_hz);  ///< (m/s2)/N
/// Sum over modes of a driving point.
std::complex<double> accelerance(std::span<const OneDegree> modes, double f_hz);

/// Displacement after t of a release from rest at x0.
double released(const OneDegree& mode, double x0, double t_s);
/// Acceleration after t of a unit impulse (1 N s), t > 0.
double impulse_acceleration(const OneDegree& mode, double t_s);

/// A half-sine blow F(t) = peak sin(pi (t - start) / contact) and the acceleration it causes, exactly.
struct HalfSine {
  double start_s;
  double peak_n;
  double contact_s;

  double force(double t_s) const;
  double acceleration(const OneDegree& mode, double t_s) const;
};

}  // namespace stillmass::oracle
