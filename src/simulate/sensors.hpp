#pragma once

#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/numeric/fir.hpp"
#include "stillmass/numeric/random.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

/// A sensor on its cable into a recorder's input: the finely sampled signal comes in in SI, fractions of the recorder's
/// full scale come out at its rate. In this order: sensitivity with its error, high-pass (first order, bilinear),
/// anti-alias filter and decimation, white noise.
class SensorChain {
 public:
  SensorChain(const Sensor& sensor, double full_scale_v, double fine_rate_hz, std::size_t factor,
              const numeric::Random& random, std::uint64_t stream);
  void push(std::span<const double> signal);
  /// What has come out so far; `finish` ends the signal.
  std::vector<double> finish();
  std::size_t half_length() const { return decimator_.half_length(); }  ///< fine samples that the filter looks ahead

 private:
  double factor_;           ///< fractions of full scale per SI unit
  double noise_deviation_;  ///< of one recorded sample, fractions of full scale
  double pole_ = 0.0;
  bool high_pass_;
  double last_in_ = 0.0;
  double last_out_ = 0.0;
  numeric::PyramidDecimator decimator_;
  numeric::Random random_;
  std::uint64_t stream_;
  std::vector<double> volts_;
  std::vector<double> out_;
};

/// A rectangular pulse once per turn as the fine grid sees it: the share of the step around the instant during which
/// the pulse is high, so that edges between the samples keep their instants.
double pulse_share(double angle_rad, double speed_rad_s, double step_s, double edge_angle_rad, double width_turns);

}  // namespace stillmass::simulate
