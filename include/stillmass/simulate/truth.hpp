#pragma once

#include <complex>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

struct ModeTruth {
  double frequency_hz = 0.0;
  double damping_ratio = 0.0;
  std::vector<double> shape;  ///< per point, 1/sqrt(kg), signed: scaled to the mass matrix

  /// Modal mass at that point, kg: 1 / shape^2.
  double modal_mass_kg(std::size_t point) const { return 1.0 / (shape[point] * shape[point]); }
};

/// A forcing line at the rated speed.
struct LineTruth {
  double frequency_hz = 0.0;
  std::vector<std::complex<double>> velocity;  ///< per point, m/s peak, of e^{i n angle} or e^{i w t}
};

/// What the points do at the rated speed, without wander and before any sensor.
struct MotionTruth {
  std::vector<LineTruth> lines;       ///< rising frequency
  std::vector<double> running_rms;    ///< per point, m/s: the line at the running frequency alone
  std::vector<double> lines_rms;      ///< the other lines together, in the band
  std::vector<double> broadband_rms;  ///< flow and ambient noise in the band
  std::vector<double> overall_rms;    ///< all together
  /// Lag in degrees, 0 to 360, from the tacho's edge to the next positive peak of the 1x velocity.
  std::vector<double> running_lag_deg;
};

/// The exact answers that a survey of the skid looks for.
struct Truth {
  std::vector<std::string> points;
  std::vector<ModeTruth> stopped;
  std::vector<ModeTruth> running;
  MotionTruth before;
  std::optional<MotionTruth> after;     ///< with the absorber of the skid file
  std::optional<double> travel_peak_m;  ///< of that absorber at 1x, relative to the machine
};

/// Frequency-domain solution. Band of the r.m.s. values: 10 to 1000 Hz, as the standards judge.
Truth truth_of(const SkidFile& file, base::Interval band_hz = {10.0, 1000.0});

/// As a TOML file for people and tests.
std::string truth_toml(const Truth& truth);

}  // namespace stillmass::simulate
