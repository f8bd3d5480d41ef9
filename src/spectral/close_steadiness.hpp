#pragma once

#include <complex>
#include <span>
#include <vector>

#include "spectral/close_fit.hpp"

namespace stillmass::spectral {

/// How amplitude and phase of what stands on some lines vary over the stretch, noise taken off.
struct Steadiness {
  double amplitude = 0.0;  ///< r.m.s. deviation over the mean
  double phase_rad = 0.0;  ///< r.m.s. deviation from a straight line
};

/// Of the lines `from` to `to` (numbers), over the middle 80 % of the stretch. `line_noise`: mean square on a line.
Steadiness steadiness(const CloseLines& lines, double from, double to, double line_noise);

/// Neighbouring lines that stand out of the noise.
struct Hump {
  double from = 0.0;  ///< first and last line, numbers
  double to = 0.0;
  double mean = 0.0;       ///< of the power over the lines
  double deviation = 0.0;  ///< r.m.s., lines
  double power = 0.0;      ///< mean square, noise taken off
};

/// The power over the lines from five sine tapers, which weigh the stretch evenly (its ends less: a steady drift is
/// found 10 to 15 % too small). The second moment of a frequency-modulated tone is the mean square deviation of its
/// frequency. Sources: Cohen, Time-Frequency Analysis, 1995, ch. 1; Riedel & Sidorenko, IEEE Trans. SP 43 (1995) 188
/// (from memory).
class Humps {
 public:
  Humps(const CloseLines& lines, double line_noise);

  /// Ascending; parted by three lines or more at the noise or 30 dB below the greatest.
  const std::vector<Hump>& all() const { return humps_; }
  /// All of them as one.
  Hump together() const;

 private:
  Hump moments(std::size_t from, std::size_t to) const;

  double first_;
  double noise_;
  double own_ = 0.0;  ///< second moment of the tapers, lines squared
  double least_ = 0.0;
  std::vector<double> power_;
  std::vector<Hump> humps_;
};

/// The same with the phase of one hump taken off: how steady the sum is beside that tone, however it wanders.
Steadiness steadiness_beside(const CloseLines& lines, double from, double to, const Hump& strongest, double line_noise);

/// Mean square on a line of the noise that is left: median over ln 2, so that a few lines do not count.
double line_noise(std::span<const std::complex<double>> residual);

}  // namespace stillmass::spectral
