#pragma once

#include <complex>
#include <cstddef>
#include <functional>
#include <span>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/rotation/speed_curve.hpp"

namespace stillmass::rotation {

/// Reads one line under a Hann window: r.m.s. amplitude with phase, x(t) = sqrt 2 Re(value e^{+i 2 pi f t}), t from the
/// start of the recording.
class HannWindow {
 public:
  HannWindow(std::size_t length, double rate_hz);

  /// At a fixed frequency. first_s: time of the first sample.
  std::complex<double> at(std::span<const double> samples, double frequency_hz, double first_s) const;
  /// Along an angle: the order times the turns at each sample, however the speed changes.
  std::complex<double> along(std::span<const double> samples, const SpeedCurve& curve, double order,
                             double first_s) const;
  /// Half the width of its main lobe: two lines.
  double lobe_hz() const { return 2.0 * rate_hz_ / static_cast<double>(taps_.size()); }

 private:
  double rate_hz_;
  std::vector<double> taps_;
};

/// What a window read.
struct Reading {
  double time_s = 0.0;  ///< middle of the window
  std::complex<double> at;
  double beside = 0.0;  ///< r.m.s. beside the line, the lesser of both sides
};

/// A steady line, from many readings joined to one long Hann window.
struct SteadyLine {
  double off_hz = 0.0;  ///< from the frequency of the readings
  double rms = 0.0;
  double resolution_hz = 0.0;  ///< 1 / time
};

/// The strongest steady line in a range about the frequency of the readings (at least two, evenly spaced), `skip`
/// leaving frequencies out. lobe_hz: of the readings' window, whose fall to the sides is made good.
SteadyLine strongest(std::span<const Reading> readings, base::Interval off_hz, double lobe_hz,
                     const std::function<bool(double off_hz)>& skip);

/// The middle one; 0 for none.
double middle_of(std::vector<double> values);

}  // namespace stillmass::rotation
