#include "simulate/forces.hpp"

#include <cmath>
#include <numbers>

#include "simulate/streams.hpp"

namespace stillmass::simulate {
namespace {

constexpr double pi = std::numbers::pi;

Vector3 axis(std::size_t number) {
  Vector3 direction{};
  direction[number] = 1.0;
  return direction;
}

void add_scaled(std::span<double> sum, const std::vector<double>& pattern, double factor) {
  if (factor == 0.0) return;
  for (std::size_t i = 0; i < pattern.size(); ++i) sum[i] += factor * pattern[i];
}

}  // namespace

Forces::Forces(const SkidFile& file, const Skid& skid, std::size_t recording_number, double step_s)
    : random_(file.seed), line_hz_(file.drive.line_hz) {
  for (std::size_t i = 0; i < file.forces.size(); ++i) {
    const Force& force = file.forces[i];
    std::array<std::vector<double>, 3> patterns;
    for (std::size_t a = 0; a < 3; ++a) patterns[a] = skid.pattern(force.body, force.at_m, axis(a));
    if (force.kind == ForceKind::neighbour) {
      const RecordingKind kind = file.recordings[recording_number].kind;
      const bool runs =
          kind == RecordingKind::steady || kind == RecordingKind::coastdown || kind == RecordingKind::background;
      if (runs) neighbours_.push_back({force, patterns});
      continue;
    }
    const bool with_speed = force.kind == ForceKind::flow;
    if (!with_speed && force.kind != ForceKind::ambient) {
      tones_.push_back({force, patterns});
      continue;
    }
    const double keep = std::exp(-2.0 * pi * force.corner_hz * step_s);
    for (std::size_t a = 0; a < 3; ++a) {
      if (force.amplitude[a] == 0.0) continue;
      const double deviation = force.amplitude[a] * std::sqrt(0.5 * pi * force.corner_hz);
      noises_.push_back({with_speed, patterns[a], force.amplitude[a], keep, deviation * std::sqrt(1.0 - keep * keep),
                         stream(recording_number, Draws::force, 3 * i + a), 0.0});
    }
  }
}

void Forces::add_tone(const Tone& tone, double time_s, const Shaft& shaft, double relative_speed,
                      std::span<double> dof_force) const {
  const Force& force = tone.force;
  if (force.kind == ForceKind::unbalance) {
    const double c = force.unbalance_kg_m * std::cos(shaft.angle + force.phase_rad);
    const double s = force.unbalance_kg_m * std::sin(shaft.angle + force.phase_rad);
    const double centripetal = shaft.speed * shaft.speed;
    add_scaled(dof_force, tone.patterns[1], centripetal * c + shaft.acceleration * s);
    add_scaled(dof_force, tone.patterns[2], centripetal * s - shaft.acceleration * c);
    return;
  }
  double level = 0.0;
  if (force.kind == ForceKind::order) {
    level = relative_speed * relative_speed * std::cos(force.multiple * shaft.angle + force.phase_rad);
  } else if (shaft.powered) {
    level = std::cos(2.0 * pi * force.multiple * line_hz_ * time_s + force.phase_rad);
  }
  for (std::size_t a = 0; a < 3; ++a) add_scaled(dof_force, tone.patterns[a], level * force.amplitude[a]);
}

void Forces::add_next(double time_s, const Shaft& shaft, double rated_speed, std::span<double> dof_force) {
  const double relative_speed = shaft.speed / rated_speed;
  if (shaft.speed > 0.0) {
    for (const Tone& tone : tones_) add_tone(tone, time_s, shaft, relative_speed, dof_force);
  }
  for (const Tone& tone : neighbours_) {
    const double level = std::cos(2.0 * pi * tone.force.frequency_hz * time_s + tone.force.phase_rad);
    for (std::size_t a = 0; a < 3; ++a) add_scaled(dof_force, tone.patterns[a], level * tone.force.amplitude[a]);
  }
  for (Noise& noise : noises_) {
    noise.value = noise.keep * noise.value + noise.fresh * random_.normal(noise.stream, sample_);
    add_scaled(dof_force, noise.pattern,
               noise.with_speed ? relative_speed * relative_speed * noise.value : noise.value);
  }
  ++sample_;
}

}  // namespace stillmass::simulate
