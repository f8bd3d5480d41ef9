#include "stillmass/simulate/truth.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <numbers>

#include "stillmass/base/number.hpp"
#include "stillmass/simulate/skid.hpp"

namespace stillmass::simulate {
namespace {

using Complex = std::complex<double>;
constexpr double two_pi = 2.0 * std::numbers::pi;
// Relative spacing of the frequencies over which noise is summed up: some forty within the bandwidth of a resonance of
// 1 % damping.
constexpr double noise_grid = 5e-4;

// A force of one frequency along one pattern, as a phasor of its own angle.
struct Push {
  std::vector<double> pattern;
  Complex force;
};

// All forcing lines at the rated speed, by frequency.
std::map<double, std::vector<Push>> pushes_of(const SkidFile& file, const Skid& skid) {
  std::map<double, std::vector<Push>> pushes;
  const double omega = two_pi * file.drive.speed_hz;
  for (const Force& force : file.forces) {
    const Complex phase = std::polar(1.0, force.phase_rad);
    if (force.kind == ForceKind::unbalance) {
      const double centripetal = force.unbalance_kg_m * omega * omega;
      auto& at_speed = pushes[file.drive.speed_hz];
      at_speed.push_back({skid.pattern(force.body, force.at_m, {0, 1, 0}), centripetal * phase});
      at_speed.push_back({skid.pattern(force.body, force.at_m, {0, 0, 1}), centripetal * phase * Complex{0.0, -1.0}});
    } else if (force.kind == ForceKind::order || force.kind == ForceKind::line) {
      const double base_hz = force.kind == ForceKind::order ? file.drive.speed_hz : file.drive.line_hz;
      pushes[force.multiple * base_hz].push_back({skid.pattern(force.body, force.at_m, force.amplitude), phase});
    } else if (force.kind == ForceKind::neighbour) {
      pushes[force.frequency_hz].push_back({skid.pattern(force.body, force.at_m, force.amplitude), phase});
    }
  }
  return pushes;
}

std::vector<LineTruth> lines_of(const SkidFile& file, const Skid& skid) {
  std::vector<LineTruth> lines;
  for (const auto& [frequency, pushes] : pushes_of(file, skid)) {
    LineTruth line{frequency, {}};
    for (const Point& point : file.points) {
      Complex displacement = 0.0;
      for (const Push& push : pushes) {
        displacement += skid.receptance(skid.pattern(point), push.pattern, frequency) * push.force;
      }
      line.velocity.push_back(Complex{0.0, two_pi * frequency} * displacement);
    }
    lines.push_back(std::move(line));
  }
  return lines;
}

// Mean square velocity of the point under all broad-band forces, by trapezoids on a geometric grid.
double noise_mean_square(const SkidFile& file, const Skid& skid, const Point& point, base::Interval band) {
  const auto out = skid.pattern(point);
  std::vector<std::pair<const Force*, std::vector<double>>> sources;
  for (const Force& force : file.forces) {
    if (force.kind != ForceKind::flow && force.kind != ForceKind::ambient) continue;
    for (std::size_t axis = 0; axis < 3; ++axis) {
      if (force.amplitude[axis] == 0.0) continue;
      Vector3 along{};
      along[axis] = force.amplitude[axis];
      sources.emplace_back(&force, skid.pattern(force.body, force.at_m, along));
    }
  }
  const auto density = [&](double f) {
    double sum = 0.0;
    for (const auto& [force, pattern] : sources) {
      const double ratio = f / force->corner_hz;
      sum += std::norm(skid.receptance(out, pattern, f) * two_pi * f) / (1.0 + ratio * ratio);
    }
    return sum;
  };
  const auto steps = static_cast<int>(std::ceil(std::log(band.hi / band.lo) / noise_grid));
  double total = 0.0;
  double last_f = band.lo;
  double last = density(last_f);
  for (int i = 1; i <= steps; ++i) {
    const double f = band.lo * std::pow(band.hi / band.lo, static_cast<double>(i) / steps);
    const double here = density(f);
    total += 0.5 * (last + here) * (f - last_f);
    last = here;
    last_f = f;
  }
  return total;
}

MotionTruth motion_of(const SkidFile& file, const Skid& skid, base::Interval band) {
  MotionTruth motion;
  motion.lines = lines_of(file, skid);
  for (std::size_t p = 0; p < file.points.size(); ++p) {
    double running = 0.0;
    double others = 0.0;
    double lag = 0.0;
    for (const LineTruth& line : motion.lines) {
      const double mean_square = 0.5 * std::norm(line.velocity[p]);
      if (line.frequency_hz == file.drive.speed_hz) {
        running = mean_square;
        lag = std::remainder(-std::arg(line.velocity[p]) - file.tacho_angle_rad, two_pi);
      } else if (band.contains(line.frequency_hz)) {
        others += mean_square;
      }
    }
    const double noise = noise_mean_square(file, skid, file.points[p], band);
    motion.running_rms.push_back(std::sqrt(running));
    motion.lines_rms.push_back(std::sqrt(others));
    motion.broadband_rms.push_back(std::sqrt(noise));
    motion.overall_rms.push_back(std::sqrt((band.contains(file.drive.speed_hz) ? running : 0.0) + others + noise));
    motion.running_lag_deg.push_back((lag < 0.0 ? lag + two_pi : lag) * 360.0 / two_pi);
  }
  return motion;
}

std::vector<ModeTruth> modes_of(const SkidFile& file, const Skid& skid) {
  std::vector<ModeTruth> modes;
  for (const NaturalMode& mode : skid.modes()) {
    ModeTruth truth{mode.frequency_hz, mode.damping_ratio, {}};
    for (const Point& point : file.points) {
      const auto pattern = skid.pattern(point);
      double at_point = 0.0;
      for (std::size_t i = 0; i < mode.shape.size(); ++i) at_point += pattern[i] * mode.shape[i];
      truth.shape.push_back(at_point);
    }
    modes.push_back(std::move(truth));
  }
  return modes;
}

std::string list(const std::vector<double>& values, double factor = 1.0) {
  std::string text = "[";
  for (std::size_t i = 0; i < values.size(); ++i) {
    text += i > 0 ? ", " : "";
    text +=
        std::isinf(values[i]) ? "inf" : base::shortest(values[i] * factor);  // a mode has no mass where it stands still
  }
  return text + "]\n";
}

void append_modes(std::string& text, const char* state, const std::vector<ModeTruth>& modes) {
  for (const ModeTruth& mode : modes) {
    std::vector<double> masses;
    for (std::size_t p = 0; p < mode.shape.size(); ++p) masses.push_back(mode.modal_mass_kg(p));
    text += "\n[[mode]]\nstate = \"" + std::string(state) + "\"\n";
    text += "frequency_hz = " + base::shortest(mode.frequency_hz) + "\n";
    text += "damping_ratio = " + base::shortest(mode.damping_ratio) + "\n";
    text += "modal_mass_kg = " + list(masses);
    text += "shape = " + list(mode.shape);
  }
}

void append_motion(std::string& text, const char* stage, const MotionTruth& motion) {
  text += "\n[" + std::string(stage) + "]\n";
  text += "running_mm_s_rms = " + list(motion.running_rms, 1e3);
  text += "running_lag_deg = " + list(motion.running_lag_deg);
  text += "lines_mm_s_rms = " + list(motion.lines_rms, 1e3);
  text += "broadband_mm_s_rms = " + list(motion.broadband_rms, 1e3);
  text += "overall_mm_s_rms = " + list(motion.overall_rms, 1e3);
  for (const LineTruth& line : motion.lines) {
    std::vector<double> rms;
    for (const Complex& velocity : line.velocity) rms.push_back(std::abs(velocity) / std::numbers::sqrt2);
    text += "[[" + std::string(stage) + ".line]]\nfrequency_hz = " + base::shortest(line.frequency_hz) + "\n";
    text += "mm_s_rms = " + list(rms, 1e3);
  }
}

}  // namespace

Truth truth_of(const SkidFile& file, base::Interval band_hz) {
  Truth truth;
  for (const Point& point : file.points) truth.points.push_back(point.name);
  truth.stopped = modes_of(file, Skid(file, Condition::stopped, false));
  const Skid bare(file, Condition::running, false);
  truth.running = modes_of(file, bare);
  truth.before = motion_of(file, bare, band_hz);
  if (file.absorber) {
    const Skid fitted(file, Condition::running, true);
    truth.after = motion_of(file, fitted, band_hz);
    for (const LineTruth& line : truth.after->lines) {
      if (line.frequency_hz != file.drive.speed_hz) continue;
      const double displacement = std::abs(line.velocity[file.absorber->point]) / (two_pi * line.frequency_hz);
      truth.travel_peak_m = displacement * std::abs(fitted.relative_travel(line.frequency_hz));
    }
  }
  return truth;
}

std::string truth_toml(const Truth& truth) {
  std::string text =
      "# The exact answers: what a survey of this skid should find. Lists have one value a point.\npoints = [";
  for (std::size_t i = 0; i < truth.points.size(); ++i) text += (i > 0 ? ", \"" : "\"") + truth.points[i] + "\"";
  text += "]\n";
  if (truth.travel_peak_m) text += "absorber_travel_mm = " + base::shortest(*truth.travel_peak_m * 1e3) + "\n";
  append_modes(text, "stopped", truth.stopped);
  append_modes(text, "running", truth.running);
  append_motion(text, "before", truth.before);
  if (truth.after) append_motion(text, "after", *truth.after);
  return text;
}

}  // namespace stillmass::simulate
