#include "oracle/one_degree.hpp"

#include <cmath>
#include <numbers>

namespace stillmass::oracle {
namespace {

using Complex = std::complex<double>;
constexpr double pi = std::numbers::pi;

}  // namespace

double OneDegree::omega() const { return 2.0 * pi * frequency_hz; }
double OneDegree::damped_omega() const { return omega() * std::sqrt(1.0 - damping_ratio * damping_ratio); }
Complex OneDegree::pole() const { return {-damping_ratio * omega(), damped_omega()}; }

Complex receptance(const OneDegree& mode, double f_hz) {
  const double w = 2.0 * pi * f_hz;
  const double k = mode.mass_kg * mode.omega() * mode.omega();
  const double c = 2.0 * mode.damping_ratio * mode.omega() * mode.mass_kg;
  return 1.0 / Complex(k - mode.mass_kg * w * w, c * w);
}

Complex mobility(const OneDegree& mode, double f_hz) { return Complex(0.0, 2.0 * pi * f_hz) * receptance(mode, f_hz); }

Complex accelerance(const OneDegree& mode, double f_hz) {
  return -std::pow(2.0 * pi * f_hz, 2) * receptance(mode, f_hz);
}

Complex accelerance(std::span<const OneDegree> modes, double f_hz) {
  Complex sum = 0.0;
  for (const OneDegree& mode : modes) sum += accelerance(mode, f_hz);
  return sum;
}

double released(const OneDegree& mode, double x0, double t_s) {
  const double sigma = mode.damping_ratio * mode.omega();
  const double wd = mode.damped_omega();
  return x0 * std::exp(-sigma * t_s) * (std::cos(wd * t_s) + sigma / wd * std::sin(wd * t_s));
}

double impulse_acceleration(const OneDegree& mode, double t_s) {
  const Complex p = mode.pole();
  return (p * p * std::exp(p * t_s)).imag() / (mode.mass_kg * mode.damped_omega());
}

double HalfSine::force(double t_s) const {
  const double t = t_s - start_s;
  return t <= 0.0 || t >= contact_s ? 0.0 : peak_n * std::sin(pi * t / contact_s);
}

double HalfSine::acceleration(const OneDegree& mode, double t_s) const {
  const double t = t_s - start_s;
  if (t <= 0.0) return 0.0;
  // x = Im I / (m wd), I = integral of F(tau) exp(p (t - tau)); I' = F + p I, hence x'' = F / m + Im(p^2 I) / (m wd).
  const double a = pi / contact_s;
  const Complex p = mode.pole();
  const Complex integral = t < contact_s
                               ? (a * std::exp(p * t) - p * std::sin(a * t) - a * std::cos(a * t)) / (p * p + a * a)
                               : a * (std::exp(p * t) + std::exp(p * (t - contact_s))) / (p * p + a * a);
  return force(t_s) / mode.mass_kg + peak_n * (p * p * integral).imag() / (mode.mass_kg * mode.damped_omega());
}

}  // namespace stillmass::oracle
