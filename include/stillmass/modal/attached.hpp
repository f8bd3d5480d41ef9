#pragma once

#include <array>
#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

/// One mode in plain numbers, seen at the point where something is attached (driving point, time factor e^{+i w t}).
struct OneMode {
  double frequency_hz = 0.0;   ///< > 0
  double damping_ratio = 0.0;  ///< >= 0
  double modal_mass_kg = 0.0;  ///< > 0, mode shape scaled to 1 at the point

  /// H(f) = 1 / (M (w1^2 - w^2 + 2 i zeta w1 w)), m/N.
  std::complex<double> receptance(double f_hz) const;
  double stiffness() const;  ///< M w1^2, N/m
};

/// The values of a mode; nothing where its modal mass is unknown.
std::optional<OneMode> plain(const Mode& mode);

/// A mass bolted on: it presses on the machine with -D x, D = -m w^2.
struct RigidMass {
  double mass_kg = 0.0;

  std::complex<double> dynamic_stiffness(double f_hz) const;  ///< D, N/m
};

/// A mass on a spring and a damper: an absorber, a trial absorber.
struct SprungMass {
  double mass_kg = 0.0;        ///< > 0
  double frequency_hz = 0.0;   ///< > 0, sqrt(k/m) / 2 pi: the mass on its spring, the foot clamped
  double damping_ratio = 0.0;  ///< c / (2 sqrt(k m))

  double stiffness() const;         ///< k, N/m
  double damping_constant() const;  ///< c, N s/m
  /// The force on the machine is -D x with D = -m w^2 (k + i w c) / (k + i w c - m w^2), N/m.
  std::complex<double> dynamic_stiffness(double f_hz) const;
  /// Displacement of the mass relative to the machine over displacement of the machine: m w^2 / (k + i w c - m w^2).
  std::complex<double> relative_motion(double f_hz) const;
};

/// Motion of the attachment point with the attached mass over motion without, for the same exciting forces:
/// 1 / (1 + H D). Holds for any receptance H of the bare machine, measured or modelled.
std::complex<double> response_ratio(std::complex<double> receptance, std::complex<double> dynamic_stiffness);

/// A receptance on lines k * line_hz with the sprung mass attached: H / (1 + H D). Line 0 is kept as it is.
std::vector<std::complex<double>> receptance_with(std::span<const std::complex<double>> receptance, double line_hz,
                                                  const SprungMass& attached);

/// Natural frequency with a rigid mass on the point: f1 / sqrt(1 + m/M), Hz.
double frequency_with(const OneMode& mode, const RigidMass& attached);

/// The two natural frequencies of the pair without damping, lower first, Hz. With g = (f/f1)^2, mu = m/M and
/// t = (fa/f1)^2: g^2 - (1 + t (1 + mu)) g + t = 0. Source: Den Hartog, Mechanical Vibrations, sec. 3.2.
std::array<double, 2> split_frequencies(const OneMode& mode, const SprungMass& attached);

/// |pole| / 2 pi and damping ratio of one pole pair.
struct DampedSplit {
  double frequency_hz = 0.0;
  double damping_ratio = 0.0;  ///< 1 or more: two real poles, frequency_hz their geometric mean
};

/// The two pole pairs of the damped pair, lower frequency first: the roots of the quartic characteristic equation.
std::array<DampedSplit, 2> damped_splits(const OneMode& mode, const SprungMass& attached);

/// Modal mass from a sprung mass of known mass and frequency, the frequency f1 of the bare machine and one split
/// frequency, damping neglected: M = m w^2 wa^2 / ((wa^2 - w^2) (w1^2 - w^2)). Nothing where the frequencies cannot
/// belong together (the split must lie below both or above both of f1 and fa).
std::optional<double> modal_mass_from_split(double f1_hz, const SprungMass& attached, double split_hz);

/// What both split frequencies and a known sprung mass say of the machine, damping neglected: f1 = f- f+ / fa and the
/// modal mass. Nothing where fa does not lie between the two.
std::optional<OneMode> machine_from_splits(std::array<double, 2> splits_hz, const SprungMass& attached);

}  // namespace stillmass::modal
