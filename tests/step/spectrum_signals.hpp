#pragma once

#include <cmath>
#include <cstddef>
#include <cstdint>
#include <numbers>
#include <utility>
#include <vector>

#include "stillmass/numeric/random.hpp"
#include "stillmass/step/spectrum.hpp"

#include "support/memory_reader.hpp"

// Recordings made sample by sample, and the machine that they are of.
namespace stillmass::tests {

inline constexpr double rate = 4096.0;
inline constexpr double two_pi = 2.0 * std::numbers::pi;

struct Part {
  double frequency = 0.0;
  double velocity = 0.0;  // r.m.s., m/s
  double phase = 0.0;
};

/// Acceleration of tones given by their velocity, in white noise of that r.m.s. acceleration.
inline std::vector<double> acceleration(double seconds, const std::vector<Part>& parts, double noise,
                                        std::uint64_t which) {
  const numeric::Random random(77);
  std::vector<double> x(static_cast<std::size_t>(seconds * rate));
  for (std::size_t i = 0; i < x.size(); ++i) {
    const double t = static_cast<double>(i) / rate;
    for (const Part& part : parts) {
      const double omega = two_pi * part.frequency;
      x[i] += std::numbers::sqrt2 * omega * part.velocity * std::cos(omega * t + part.phase);
    }
    x[i] += noise * random.normal(which, static_cast<std::uint32_t>(i));
  }
  return x;
}

/// A 30 kW fan on the line: two poles, 2985 r/min.
inline step::Site two_pole_fan() {
  step::Site site;
  site.machine.emplace();
  site.machine->kind = machine::MachineKind::fan;
  site.machine->power_w = 30e3;
  site.machine->speed_hz = base::Interval{49.7, 49.7};
  site.machine->line_frequency_hz = 50.0;
  site.machine->motor_poles = 2;
  site.machine->foundation = machine::Support::rigid;
  site.points = {{"fan-h", "horizontal", true}, {"fan-v", "vertical", true}, {"frame", "vertical", false}};
  return site;
}

inline step::SpectrumResult analysed(std::vector<MemoryChannel> channels, const step::SpectrumRequest& request) {
  const MemoryReader reader(rate, std::move(channels));
  return step::spectrum(reader, request, {});
}

}  // namespace stillmass::tests
