#pragma once

#include <complex>
#include <functional>
#include <vector>

namespace stillmass::oracle {

// Two masses in a row, ground - (k1, c1) - m1 - (k2, c2) - m2, from the equations of motion
//   m1 x1'' + c1 (x1' - y') + k1 (x1 - y) + c2 (x1' - x2') + k2 (x1 - x2) = F
//   m2 x2'' + c2 (x2' - x1') + k2 (x2 - x1) = 0
// with the ground's motion y, solved as a 2 x 2 complex system or stepped in time: apart from the program's formulas.
// Time factor e^{+i w t}; SI.

struct TwoMass {
  double m1, k1, c1;
  double m2, k2, c2;
};

/// From frequencies (Hz) and damping ratios, each mass on its own spring.
TwoMass two_mass(double m1, double f1_hz, double z1, double m2, double f2_hz, double z2);

struct Amplitudes {
  std::complex<double> machine;
  std::complex<double> absorber;
};

/// Displacements under a force on m1.
Amplitudes under_force(const TwoMass& pair, std::complex<double> force, double f_hz);
/// Displacements when the ground moves with displacement amplitude y.
Amplitudes under_ground(const TwoMass& pair, std::complex<double> y, double f_hz);
/// Displacement of m1 alone under a force.
std::complex<double> machine_alone(const TwoMass& pair, std::complex<double> force, double f_hz);

struct State {
  double t, x1, v1, x2, v2;
};

/// From rest, a force on m1, `step` seconds a step (Runge-Kutta, fourth order); every state from t = 0 to `end`.
std::vector<State> integrate(const TwoMass& pair, const std::function<double(double)>& force, double end, double step);

}  // namespace stillmass::oracle
