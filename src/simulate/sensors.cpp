#include "simulate/sensors.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stillmass::simulate {
namespace {

constexpr double pi = std::numbers::pi;

}  // namespace

SensorChain::SensorChain(const Sensor& sensor, double full_scale_v, double fine_rate_hz, std::size_t factor,
                         const numeric::Random& random, std::uint64_t stream)
    : factor_(sensor.sensitivity_v * (1.0 + sensor.sensitivity_error) / (sensor.unit.to_si * full_scale_v)),
      noise_deviation_(sensor.noise * sensor.sensitivity_v / full_scale_v *
                       std::sqrt(0.5 * fine_rate_hz / static_cast<double>(factor))),
      high_pass_(sensor.low_corner_hz > 0.0),
      decimator_(factor),
      random_(random),
      stream_(stream) {
  const double warped = std::tan(pi * sensor.low_corner_hz / fine_rate_hz);
  pole_ = (1.0 - warped) / (1.0 + warped);
}

void SensorChain::push(std::span<const double> signal) {
  volts_.resize(signal.size());
  for (std::size_t i = 0; i < signal.size(); ++i) {
    const double in = signal[i] * factor_;
    if (high_pass_) {
      last_out_ = pole_ * last_out_ + 0.5 * (1.0 + pole_) * (in - last_in_);
      last_in_ = in;
      volts_[i] = last_out_;
    } else {
      volts_[i] = in;
    }
  }
  decimator_.push(volts_, out_);
}

std::vector<double> SensorChain::finish() {
  decimator_.finish(out_);
  if (noise_deviation_ > 0.0) {
    for (std::size_t i = 0; i < out_.size(); ++i) {
      out_[i] += noise_deviation_ * random_.normal(stream_, static_cast<std::uint32_t>(i));
    }
  }
  return std::move(out_);
}

double pulse_share(double angle_rad, double speed_rad_s, double step_s, double edge_angle_rad, double width_turns) {
  // Turns since an edge, counted so that the pulse is high while their fraction is below the width.
  const double turns = (angle_rad - edge_angle_rad) / (2.0 * pi);
  const double half_step = 0.5 * speed_rad_s * step_s / (2.0 * pi);
  const auto high_until = [&](double t) {  // turns spent high up to t
    const double whole = std::floor(t);
    return whole * width_turns + std::min(t - whole, width_turns);
  };
  if (half_step <= 1e-12) return turns - std::floor(turns) < width_turns ? 1.0 : 0.0;
  return std::clamp((high_until(turns + half_step) - high_until(turns - half_step)) / (2.0 * half_step), 0.0, 1.0);
}

}  // namespace stillmass::simulate
