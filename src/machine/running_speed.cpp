#include <algorithm>

#include <fmt/format.h>

#include "stillmass/machine/forcing.hpp"

namespace stillmass::machine {
namespace {

constexpr double tolerance = 0.03;                        // of a nominal speed
constexpr base::Interval motor_slip_range{0.92, 0.9995};  // speed over synchronous speed; above stands the line itself
constexpr double alike = 0.5;                             // 6 dB

// Where the running speed can be, Hz.
base::Interval possible_speeds(const Machine& machine) {
  const base::Interval nominal = *machine.speed_hz;
  if (nominal.width() > 0.0) return nominal;
  base::Interval range{(1.0 - tolerance) * nominal.lo, (1.0 + tolerance) * nominal.hi};
  if (machine.supply == Supply::line && machine.line_frequency_hz && machine.motor_poles) {
    const double synchronous = 2.0 * *machine.line_frequency_hz / *machine.motor_poles;
    const base::Interval motor{motor_slip_range.lo * synchronous, motor_slip_range.hi * synchronous};
    if (motor.contains(nominal.middle())) range = {std::max(range.lo, motor.lo), std::min(range.hi, motor.hi)};
  }
  return range;
}

base::Refusal unknown(std::string seen, std::string measure) {
  return {"speed-unknown", std::move(seen), std::move(measure)};
}

}  // namespace

base::Answer<base::Estimate> running_speed(std::span<const Peak> peaks, const Machine& machine) {
  if (!machine.speed_hz) return unknown("the nominal speed is not known", "say the speed, or record a tacho");
  const base::Interval range = possible_speeds(machine);
  const Peak* first = nullptr;
  const Peak* second = nullptr;
  for (const Peak& peak : peaks) {
    if (!range.contains(peak.frequency.value)) continue;
    if (first == nullptr || peak.amplitude > first->amplitude) {
      second = first;
      first = &peak;
    } else if (second == nullptr || peak.amplitude > second->amplitude) {
      second = &peak;
    }
  }
  if (first == nullptr) {
    return unknown(fmt::format("no line between {:.2f} and {:.2f} Hz, where the speed must be", range.lo, range.hi),
                   "record a tacho, or check the nominal speed");
  }
  if (second != nullptr && second->amplitude > alike * first->amplitude) {
    return unknown(fmt::format("two lines alike where the speed must be: {:.2f} and {:.2f} Hz", first->frequency.value,
                               second->frequency.value),
                   "record a tacho, or say the speed more closely");
  }
  base::Estimate speed = first->frequency;
  speed.quantity = base::Quantity::speed;
  return speed;
}

}  // namespace stillmass::machine
