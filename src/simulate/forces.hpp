#pragma once

#include <array>
#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/numeric/random.hpp"
#include "stillmass/simulate/skid.hpp"

#include "simulate/speed.hpp"

namespace stillmass::simulate {

/// All forces of a skid file but the hammer's, sample by sample on a grid of instants, as forces on the degrees of
/// freedom. Broad-band forces are first-order (Ornstein-Uhlenbeck) noise, exact at the samples: one-sided density
/// d^2 / (1 + (f/corner)^2) with variance d^2 corner pi / 2.
class Forces {
 public:
  Forces(const SkidFile& file, const Skid& skid, std::size_t recording_number, double step_s);
  /// Adds the forces of the next sample, at which the shaft stands so. `rated_speed` in rad/s.
  void add_next(double time_s, const Shaft& shaft, double rated_speed, std::span<double> dof_force);

 private:
  struct Tone {
    Force force;
    std::array<std::vector<double>, 3> patterns;
  };
  struct Noise {
    bool with_speed;
    std::vector<double> pattern;
    double density;
    double keep;   ///< of the last value
    double fresh;  ///< standard deviation of what is new
    std::uint64_t stream;
    double value;
  };
  void add_tone(const Tone& tone, double time_s, const Shaft& shaft, double relative_speed,
                std::span<double> dof_force) const;

  numeric::Random random_;
  double line_hz_;
  std::vector<Tone> tones_;
  std::vector<Tone> neighbours_;
  std::vector<Noise> noises_;
  std::uint32_t sample_ = 0;
};

}  // namespace stillmass::simulate
