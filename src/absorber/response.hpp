#pragma once

#include <array>
#include <optional>

#include "stillmass/absorber/coupled.hpp"
#include "stillmass/absorber/forcing.hpp"
#include "stillmass/base/interval.hpp"

namespace stillmass::absorber {

/// The squared response that a sizing makes least, as a function of s = (f/f1)^2:
///   R = s^p (1 + q s) [(e t - s)^2 + s (e c)^2] / D,
/// with t, c, D of `Coupled` and
///   constant force   p = 0 (displacement), 1 (velocity)
///   unbalance        p = 2, 3
///   base             relative displacement: p = 0, e = 1 + mu; absolute velocity: p = -1, q = 4 z1^2
///   random           like constant (line by line)
class Response {
 public:
  Response(const Coupled& pair, Forcing forcing, Objective objective);

  /// ln R and its first two derivatives by s.
  struct Slope {
    double first = 0.0;
    double second = 0.0;
  };
  double value(double s) const;
  Slope log_slope(double s) const;
  /// Derivatives of ln R by ln(tuning) and ln(absorber damping) at fixed s.
  struct Sensitivity {
    double log_tuning = 0.0;
    double log_damping = 0.0;
  };
  Sensitivity sensitivity(double s) const;

  const Coupled& pair() const { return pair_; }

 private:
  Coupled pair_;
  int power_ = 0;
  double base_ = 0.0;  // q
  double own_ = 1.0;   // e
};

/// The two resonance peaks of R. `hint`: where they were for nearly the same absorber.
std::optional<std::array<double, 2>> two_peaks(const Response& response,
                                               const std::optional<std::array<double, 2>>& hint);

/// The greatest R for s in the range, its ends included.
double greatest(const Response& response, base::Interval s_range);

/// The s within which all resonances lie.
base::Interval resonant_range(const Response& response);

/// R of the bare machine with the same weight, for carrying a force from one frequency to another: the square of
/// absolute velocity (times a constant) under that forcing.
double bare_velocity(double machine_damping, Forcing forcing, double s);

/// The weight s^p (1 + q s) of absolute velocity under that forcing.
double velocity_weight(double machine_damping, Forcing forcing, double s);

}  // namespace stillmass::absorber
