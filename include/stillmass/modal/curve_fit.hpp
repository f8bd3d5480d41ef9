#pragma once

#include <array>
#include <complex>
#include <cstddef>
#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/modal/half_power.hpp"
#include "stillmass/numeric/nonlinear_fit.hpp"

namespace stillmass::modal {

/// One accelerance on the common lines, with the standard uncertainty of its real part (as of its imaginary part).
struct MeasuredResponse {
  std::span<const std::complex<double>> accelerance;  ///< (m/s2)/N
  std::span<const double> u;                          ///< > 0; may be relative among each other
};

/// A fitted mode. Its term of the accelerance at point p is
///   s^2 (a_p + b_p s / w) / (s^2 + 2 z w s + w^2),   w = 2 pi f,
/// so that a = 1 / m, b = 0 for the driving point of a system with real modes.
struct FittedMode {
  FrequencyAndDamping system;
  double frequency_u = 0.0;
  double damping_u = 0.0;
  bool settled = true;  ///< false: pressed against a bound (damping 0 or 0.5, twice or half the start)
  std::vector<std::complex<double>> strength;  ///< 1/kg, a + b s / w at the pole, one a response
  std::vector<double> strength_u;              ///< of its magnitude
  /// Of frequency, damping ratio and modal mass at the first response.
  std::array<std::array<double, 3>, 3> correlation{{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}};

  /// 1 / |strength| at response p: the modal mass, if p is the driving point.
  double mass_kg(std::size_t p = 0) const { return 1.0 / std::abs(strength[p]); }
};

/// What lies outside the lines fitted: c0 + c1 (s/S) + c2 (s/S)^2, S the largest |s|: the mass line of the modes below,
/// the stiffness line of those above, and between them what their damping and the sensors' phase leave.
struct Residual {
  double mass_line = 0.0;
  double damping_line = 0.0;
  double stiffness_line = 0.0;

  std::complex<double> at(std::complex<double> relative_s) const {
    return mass_line + relative_s * (damping_line + relative_s * stiffness_line);
  }
};

struct CurveFit {
  std::vector<FittedMode> modes;    ///< by frequency
  std::vector<Residual> residuals;  ///< one a response
  double scale_s = 1.0;             ///< the largest |s|, rad/s
  double chi_square_per_dof = 0.0;  ///< near 1 where the uncertainties given are right and the model holds
  double dof = 0.0;
  numeric::StopReason reason = numeric::StopReason::converged;

  std::complex<double> accelerance(std::size_t response, std::complex<double> s) const;
};

/// Fits modes common to all responses to their accelerances at the lines s_k = 2 pi i f_k + decay_per_s, where
/// decay_per_s = 1 / tau of an exponential window on force and response (0 without): the poles come out free of it.
/// First linear least squares for the strengths at the start's poles, then Levenberg-Marquardt on everything.
/// Uncertainties are scaled by the scatter about the fit. Throws `Error` (internal) for lengths that do not fit or no
/// start. Refuses `no-fit` where there are too few lines for so many modes or the steps lead nowhere.
base::Answer<CurveFit> curve_fit(std::span<const double> frequency_hz, std::span<const MeasuredResponse> responses,
                                 std::span<const FrequencyAndDamping> start, double decay_per_s = 0.0);

}  // namespace stillmass::modal
