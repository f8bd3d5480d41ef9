#include "rotation/base_band.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stillmass::rotation {
namespace {

using Complex = std::complex<double>;
using std::numbers::pi;

double long_rms(std::span<const Reading> readings, double off_hz, double lobe_hz) {
  Complex sum = 0.0;
  double weights = 0.0;
  for (std::size_t i = 0; i < readings.size(); ++i) {
    const double part = (static_cast<double>(i) + 0.5) / static_cast<double>(readings.size());
    const double hann = 0.5 - 0.5 * std::cos(2.0 * pi * part);
    sum += hann * readings[i].at * std::polar(1.0, -2.0 * pi * off_hz * readings[i].time_s);
    weights += hann;
  }
  // What the short window lets through so far from its middle: sinc(x) / (1 - x^2), x in lines of the window.
  const double x = 2.0 * std::abs(off_hz) / lobe_hz;
  const double passes = x < 1e-6 ? 1.0 : std::abs(x - 1.0) < 1e-6 ? 0.5 : std::sin(pi * x) / (pi * x * (1.0 - x * x));
  return std::abs(sum) / weights / passes;
}

}  // namespace

HannWindow::HannWindow(std::size_t length, double rate_hz) : rate_hz_(rate_hz) {
  double sum = 0.0;
  for (std::size_t i = 0; i < length; ++i) {
    const double part = (static_cast<double>(i) + 0.5) / static_cast<double>(length);
    taps_.push_back(0.5 - 0.5 * std::cos(2.0 * pi * part));
    sum += taps_.back();
  }
  for (double& tap : taps_) tap *= std::numbers::sqrt2 / sum;
}

Complex HannWindow::at(std::span<const double> samples, double frequency_hz, double first_s) const {
  const Complex step = std::polar(1.0, -2.0 * pi * frequency_hz / rate_hz_);
  Complex turn = std::polar(1.0, -2.0 * pi * std::fmod(frequency_hz * first_s, 1.0));
  Complex sum = 0.0;
  for (std::size_t i = 0; i < samples.size(); ++i) {
    sum += taps_[i] * samples[i] * turn;
    turn *= step;
  }
  return sum;
}

Complex HannWindow::along(std::span<const double> samples, const SpeedCurve& curve, double order,
                          double first_s) const {
  Complex sum = 0.0;
  for (std::size_t i = 0; i < samples.size(); ++i) {
    const double angle = order * curve.turn_at(first_s + static_cast<double>(i) / rate_hz_);
    sum += taps_[i] * samples[i] * std::polar(1.0, -2.0 * pi * std::fmod(angle, 1.0));
  }
  return sum;
}

SteadyLine strongest(std::span<const Reading> readings, base::Interval off_hz, double lobe_hz,
                     const std::function<bool(double off_hz)>& skip) {
  SteadyLine out;
  out.resolution_hz = 1.0 / (readings.back().time_s - readings.front().time_s);
  const double step = 0.1 * out.resolution_hz;
  for (double off = off_hz.lo; off <= off_hz.hi; off += step) {
    if (skip(off)) continue;
    const double rms = long_rms(readings, off, lobe_hz);
    if (rms > out.rms) {
      out.rms = rms;
      out.off_hz = off;
    }
  }
  return out;
}

double middle_of(std::vector<double> values) {
  if (values.empty()) return 0.0;
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  return *middle;
}

}  // namespace stillmass::rotation
