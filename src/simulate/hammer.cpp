#include "simulate/hammer.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace stillmass::simulate {
namespace {

constexpr double off_the_beat_s = 0.3;

}  // namespace

std::vector<Pulse> blows_of(const Hammer& hammer, const numeric::Random& random, std::uint64_t stream) {
  std::vector<Pulse> pulses;
  for (int blow = 1; blow <= hammer.blows; ++blow) {
    const auto draw = static_cast<std::uint32_t>(2 * blow);
    Pulse pulse;
    pulse.start_s = hammer.first_s + (blow - 1) * hammer.interval_s;
    if (blow > 1) pulse.start_s += off_the_beat_s * (2.0 * random.uniform(stream, draw) - 1.0);
    pulse.peak_n = hammer.peak_n * (1.0 + hammer.spread * std::clamp(random.normal(stream, draw + 1), -2.0, 2.0));
    if (blow == hammer.overload) pulse.peak_n = hammer.peak_n * hammer.overload_ratio;
    pulse.duration_s = hammer.tip_s;
    pulses.push_back(pulse);
    if (blow == hammer.double_hit) {
      pulses.push_back({pulse.start_s + hammer.bounce_s, pulse.peak_n * hammer.bounce_ratio, hammer.tip_s});
    }
  }
  return pulses;
}

double force_at(const std::vector<Pulse>& pulses, double time_s) {
  double force = 0.0;
  for (const Pulse& pulse : pulses) {
    const double into = time_s - pulse.start_s;
    if (into > 0.0 && into < pulse.duration_s) {
      force += pulse.peak_n * std::sin(std::numbers::pi * into / pulse.duration_s);
    }
  }
  return force;
}

}  // namespace stillmass::simulate
