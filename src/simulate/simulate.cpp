#include "stillmass/simulate/simulate.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/base/parallel.hpp"
#include "stillmass/simulate/skid.hpp"

#include "simulate/forces.hpp"
#include "simulate/hammer.hpp"
#include "simulate/integrate.hpp"
#include "simulate/recorder.hpp"
#include "simulate/sensors.hpp"
#include "simulate/speed.hpp"
#include "simulate/streams.hpp"

namespace stillmass::simulate {
namespace {

constexpr std::size_t block = 4096;             // fine samples between two looks at the stop request
constexpr double run_in_time_constants = 12.0;  // e^-12 of the start is left at the first recorded sample

bool stands_still(RecordingKind kind) { return kind != RecordingKind::steady && kind != RecordingKind::coastdown; }

// The sensors are not on the skid.
bool is_calibration(RecordingKind kind) {
  return kind == RecordingKind::calibrator || kind == RecordingKind::hung_mass;
}

// A handheld exciter: 10 m/s2 r.m.s. at 1000 rad/s (common practice).
double exciter(double time_s) { return 10.0 * std::numbers::sqrt2 * std::sin(1000.0 * time_s); }

ShaftMotion shaft_of(const SkidFile& file, std::size_t number) {
  const PlannedRecording& plan = file.recordings[number];
  const numeric::Random random(file.seed);
  const auto draws = stream(number, Draws::speed);
  if (stands_still(plan.kind)) return ShaftMotion::standstill();
  if (plan.kind == RecordingKind::steady) return ShaftMotion::steady(file.drive, random, draws);
  return ShaftMotion::coastdown(file.drive, plan.switch_off_s, random, draws);
}

// How long the slowest motion takes to forget its start.
double run_in_s(const SkidFile& file, const Skid& skid, bool fitted) {
  double slowest = std::numeric_limits<double>::infinity();
  for (const NaturalMode& mode : skid.modes()) slowest = std::min(slowest, mode.damping_ratio * mode.frequency_hz);
  if (fitted) slowest = std::min(slowest, std::max(file.absorber->damping_ratio, 1e-3) * file.absorber->frequency_hz);
  return run_in_time_constants / (2.0 * std::numbers::pi * slowest);
}

double dot(const std::vector<double>& row, const std::vector<double>& state, const std::vector<double>& force) {
  double sum = 0.0;
  for (std::size_t i = 0; i < state.size(); ++i) sum += row[i] * state[i];
  for (std::size_t i = 0; i < force.size(); ++i) sum += row[state.size() + i] * force[i];
  return sum;
}

/// One recording being made: the skid moves in fine steps, the sensors listen.
class Session {
 public:
  Session(const SkidFile& file, std::size_t number)
      : file_(file),
        plan_(file.recordings[number]),
        factor_(oversampling(plan_.rate_hz)),
        step_s_(1.0 / (plan_.rate_hz * static_cast<double>(factor_))),
        skid_(file, stands_still(plan_.kind) ? Condition::stopped : Condition::running, plan_.fitted),
        shaft_(shaft_of(file, number)),
        forces_(file, skid_, number, step_s_),
        propagator_(skid_.mass(), skid_.damping(), skid_.stiffness(), step_s_),
        state_(2 * skid_.dofs(), 0.0) {
    if (plan_.kind == RecordingKind::bump || plan_.kind == RecordingKind::hung_mass) {
      pulses_ = blows_of(*file.hammer, numeric::Random(file.seed), stream(number, Draws::hammer));
      hammer_pattern_ = skid_.pattern(file.points[file.hammer->point]);
    }
    for (std::size_t c = 0; c < plan_.channels.size(); ++c) {
      const PlannedChannel& channel = plan_.channels[c];
      chains_.emplace_back(file.sensors[channel.sensor], channel.full_scale_v, 1.0 / step_s_, factor_,
                           numeric::Random(file.seed), stream(number, Draws::sensor, c));
      rows_.push_back(channel.role == recording::Role::vibration
                          ? propagator_.acceleration_row(skid_.pattern(file.points[channel.point]))
                          : std::vector<double>{});
    }
    frames_ = static_cast<std::size_t>(std::llround(plan_.duration_s * plan_.rate_hz));
    const double run_in = std::max(run_in_s(file, skid_, plan_.fitted), 1.0);
    run_in_frames_ = static_cast<std::size_t>(std::ceil(run_in * plan_.rate_hz));
  }

  /// Fractions of full scale, one list a channel.
  std::vector<std::vector<double>> run(const base::Context& context) {
    const std::size_t look_ahead = chains_.front().half_length() / factor_ + 1;
    const std::size_t fine_samples = (run_in_frames_ + frames_ + look_ahead) * factor_;
    std::vector<std::vector<double>> signals(chains_.size());
    std::vector<double> force = force_at_sample(0);
    for (std::size_t n = 0; n < fine_samples; ++n) {
      listen(n, force, signals);
      if (!is_calibration(plan_.kind)) {
        auto next = force_at_sample(n + 1);
        propagator_.step(state_, force, next);
        std::swap(force, next);
      }
      if (signals.front().size() == block || n + 1 == fine_samples) {
        context.check_stop();
        for (std::size_t c = 0; c < chains_.size(); ++c) {
          chains_[c].push(signals[c]);
          signals[c].clear();
        }
      }
    }
    std::vector<std::vector<double>> fractions;
    for (SensorChain& chain : chains_) {
      const auto all = chain.finish();
      const auto begin = all.begin() + static_cast<std::ptrdiff_t>(run_in_frames_);
      fractions.emplace_back(begin, begin + static_cast<std::ptrdiff_t>(frames_));
    }
    return fractions;
  }

 private:
  double time_of(std::size_t n) const {
    return (static_cast<double>(n) - static_cast<double>(run_in_frames_ * factor_)) * step_s_;
  }

  // Must be asked for the samples in order: the noise has a memory.
  std::vector<double> force_at_sample(std::size_t n) {
    std::vector<double> force(skid_.dofs(), 0.0);
    const double time_s = time_of(n);
    forces_.add_next(time_s, shaft_.at(time_s), shaft_.rated_speed(), force);
    const double blow = force_at(pulses_, time_s);
    if (blow != 0.0) {
      for (std::size_t i = 0; i < force.size(); ++i) force[i] += blow * hammer_pattern_[i];
    }
    return force;
  }

  void listen(std::size_t n, const std::vector<double>& force, std::vector<std::vector<double>>& signals) const {
    for (std::size_t c = 0; c < chains_.size(); ++c) {
      const recording::Role role = plan_.channels[c].role;
      if (role == recording::Role::vibration) {
        signals[c].push_back(acceleration(c, n, force));
      } else if (role == recording::Role::force) {
        signals[c].push_back(force_at(pulses_, time_of(n)));
      } else {
        const Shaft shaft = shaft_.at(time_of(n));
        signals[c].push_back(pulse_share(shaft.angle, shaft.speed, step_s_, file_.tacho_angle_rad, file_.tacho_width));
      }
    }
  }

  double acceleration(std::size_t c, std::size_t n, const std::vector<double>& force) const {
    if (plan_.kind == RecordingKind::calibrator) return exciter(time_of(n));
    if (plan_.kind == RecordingKind::hung_mass) return force_at(pulses_, time_of(n)) / plan_.hung_mass_kg;
    return dot(rows_[c], state_, force);
  }

  const SkidFile& file_;
  const PlannedRecording& plan_;
  std::size_t factor_;
  double step_s_;
  Skid skid_;
  ShaftMotion shaft_;
  Forces forces_;
  Propagator propagator_;
  std::vector<double> state_;
  std::vector<Pulse> pulses_;
  std::vector<double> hammer_pattern_;
  std::vector<SensorChain> chains_;
  std::vector<std::vector<double>> rows_;
  std::size_t frames_ = 0;
  std::size_t run_in_frames_ = 0;
};

std::string channel_name(const SkidFile& file, const PlannedChannel& channel) {
  if (channel.role == recording::Role::force) return "hammer";
  if (channel.role == recording::Role::tacho) return "tacho";
  return file.points[channel.point].name;
}

void write(const std::filesystem::path& target, const PlannedRecording& plan, const recording::Samples& samples) {
  if (plan.csv) {
    recording::CsvStyle style = *plan.csv;
    // As many decimals as the instants need, up to a microsecond.
    style.time_decimals = 0;
    while (style.time_decimals < 6 &&
           std::abs(std::remainder(std::pow(10.0, style.time_decimals) / plan.rate_hz, 1.0)) > 1e-9) {
      ++style.time_decimals;
    }
    recording::write_csv(target, samples, style);
  } else {
    recording::write_wav(target, samples, plan.bits);
  }
}

}  // namespace

recording::Samples samples_of(const SkidFile& file, std::size_t recording_number, const base::Context& context) {
  const PlannedRecording& plan = file.recordings.at(recording_number);
  recording::Samples samples;
  samples.rate_hz = plan.rate_hz;
  samples.channels = Session(file, recording_number).run(context);
  for (std::size_t c = 0; c < plan.channels.size(); ++c) {
    const PlannedChannel& channel = plan.channels[c];
    const Sensor& sensor = file.sensors[channel.sensor];
    std::string name = channel_name(file, channel);
    if (plan.csv) {
      name += " [" + std::string(sensor.unit.name) + "]";
      const double full_scale = channel.full_scale_v / sensor.sensitivity_v;
      for (double& value : samples.channels[c]) value = stored(value, plan.bits) * full_scale;
    }
    samples.names.push_back(std::move(name));
  }
  return samples;
}

std::vector<std::filesystem::path> write_recordings(const SkidFile& file, const std::filesystem::path& folder,
                                                    const base::Context& context) {
  std::vector<std::filesystem::path> targets;
  for (const PlannedRecording& plan : file.recordings) {
    targets.push_back(folder / plan.file);
    if (std::filesystem::exists(std::filesystem::symlink_status(targets.back()))) {
      throw base::file_error(targets.back().string(), "exists already", "choose another folder or remove it");
    }
  }
  std::size_t written = 0;
  base::for_ranges(
      context, targets.size(), 1, [&](std::size_t begin, std::size_t) { return samples_of(file, begin, context); },
      [&](const recording::Samples& samples) {
        write(targets[written], file.recordings[written], samples);
        ++written;
        context.report("simulating", static_cast<double>(written) / static_cast<double>(targets.size()));
      });
  return targets;
}

}  // namespace stillmass::simulate
