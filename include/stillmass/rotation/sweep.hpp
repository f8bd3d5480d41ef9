#pragma once

namespace stillmass::rotation {

/// How fast a sweep is for a resonance: eta = |S| / (2 zeta f)^2 with S in Hz/s, f natural frequency in Hz.
double sweep_parameter(double frequency_hz, double damping_ratio, double rate_hz_per_s);

/// Highest response during the sweep over the steady one: 1 - exp(-2.86 eta^-0.445); within 0.017 for eta <= 100.
/// Source: Cronin 1968, after ECSS-E-HB-32-26A (from memory, confirmed by simulation).
double swept_peak_fraction(double eta);

/// Highest response of an undamped mode to a constant force swept through at S Hz/s, over the static one:
/// 3.67 f / sqrt S. Source: Fearn & Millsaps 1967, method of Lewis 1932 (from memory, confirmed by simulation).
double undamped_passage(double frequency_hz, double rate_hz_per_s);

/// Sweep rate for at most 5 % loss at the peak, Hz/s: 54/60 f^2 / Q^2 with Q = 1 / (2 zeta). Source: ISO 7626-2, linear
/// sweep (from memory); direct simulation loses 5.4 to 5.7 % there.
double sweep_rate_limit(double frequency_hz, double damping_ratio);

/// Frequency by which a component of that order moves during a block of `block_s`: order |S| T, Hz. A spectrum is free
/// of smear where this stays within one line (common practice).
double smear_hz(double order, double rate_hz_per_s, double block_s);

}  // namespace stillmass::rotation
