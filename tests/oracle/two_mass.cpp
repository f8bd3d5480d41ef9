#include "oracle/two_mass.hpp"

#include <array>
#include <numbers>

namespace stillmass::oracle {
namespace {

using complex = std::complex<double>;

double omega(double f_hz) { return 2.0 * std::numbers::pi * f_hz; }

Amplitudes solve(const TwoMass& p, complex right1, double f_hz) {
  const double w = omega(f_hz);
  const complex a11(p.k1 + p.k2 - p.m1 * w * w, w * (p.c1 + p.c2));
  const complex a12(-p.k2, -w * p.c2);
  const complex a22(p.k2 - p.m2 * w * w, w * p.c2);
  const complex determinant = a11 * a22 - a12 * a12;
  return {right1 * a22 / determinant, -right1 * a12 / determinant};
}

}  // namespace

TwoMass two_mass(double m1, double f1_hz, double z1, double m2, double f2_hz, double z2) {
  const double w1 = omega(f1_hz);
  const double w2 = omega(f2_hz);
  return {m1, m1 * w1 * w1, 2.0 * z1 * m1 * w1, m2, m2 * w2 * w2, 2.0 * z2 * m2 * w2};
}

Amplitudes under_force(const TwoMass& p, complex force, double f_hz) { return solve(p, force, f_hz); }

Amplitudes under_ground(const TwoMass& p, complex y, double f_hz) {
  return solve(p, y * complex(p.k1, omega(f_hz) * p.c1), f_hz);
}

complex machine_alone(const TwoMass& p, complex force, double f_hz) {
  const double w = omega(f_hz);
  return force / complex(p.k1 - p.m1 * w * w, w * p.c1);
}

std::vector<State> integrate(const TwoMass& p, const std::function<double(double)>& force, double end, double step) {
  using Vector = std::array<double, 4>;  // x1, v1, x2, v2
  const auto rate = [&](double t, const Vector& s) -> Vector {
    const double pull = p.k2 * (s[0] - s[2]) + p.c2 * (s[1] - s[3]);
    return {s[1], (force(t) - p.k1 * s[0] - p.c1 * s[1] - pull) / p.m1, s[3], pull / p.m2};
  };
  const auto moved = [](const Vector& s, const Vector& r, double h) -> Vector {
    return {s[0] + h * r[0], s[1] + h * r[1], s[2] + h * r[2], s[3] + h * r[3]};
  };
  std::vector<State> states;
  Vector s{};
  const auto steps = static_cast<std::size_t>(end / step);
  for (std::size_t i = 0; i <= steps; ++i) {
    const double t = static_cast<double>(i) * step;
    states.push_back({t, s[0], s[1], s[2], s[3]});
    const Vector r1 = rate(t, s);
    const Vector r2 = rate(t + 0.5 * step, moved(s, r1, 0.5 * step));
    const Vector r3 = rate(t + 0.5 * step, moved(s, r2, 0.5 * step));
    const Vector r4 = rate(t + step, moved(s, r3, step));
    for (std::size_t k = 0; k < 4; ++k) s[k] += step / 6.0 * (r1[k] + 2.0 * r2[k] + 2.0 * r3[k] + r4[k]);
  }
  return states;
}

}  // namespace stillmass::oracle
