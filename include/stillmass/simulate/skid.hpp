#pragma once

#include <complex>
#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/numeric/matrix.hpp"
#include "stillmass/simulate/skid_file.hpp"

namespace stillmass::simulate {

enum class Condition { stopped, running };

/// A mode of the skid without absorber; shape scaled to phi^T M phi = 1.
struct NaturalMode {
  double frequency_hz = 0.0;
  double damping_ratio = 0.0;
  std::vector<double> shape;
};

/// The skid as M q'' + C q' + K q = F. Degrees of freedom: per body x, y, z of its centre of mass and the rotations
/// about x, y, z (small angles); with an absorber one more, its absolute displacement along its point's direction.
/// The skid's own damping is modal: C = M (sum 2 zeta_r w_r phi_r phi_r^T) M; the absorber's dashpot is added to it.
class Skid {
 public:
  /// Throws `Error` (usage) where the bodies are not held by springs (a mode below 0.1 Hz), or where `fitted` is asked
  /// for and the file has no absorber.
  Skid(const SkidFile& file, Condition condition, bool fitted);

  std::size_t dofs() const { return mass_.size(); }
  std::span<const double> mass() const { return mass_; }  ///< M is diagonal
  const numeric::Matrix& damping() const { return damping_; }
  const numeric::Matrix& stiffness() const { return stiffness_; }
  const std::vector<NaturalMode>& modes() const { return modes_; }

  /// The p with: displacement of the place along `direction` = p^T q; and F = p for a force of 1 N there.
  std::vector<double> pattern(std::size_t body, const Vector3& at_m, const Vector3& direction) const;
  std::vector<double> pattern(const Point& point) const { return pattern(point.body, point.at_m, point.direction); }

  /// Receptance, m/N, at f Hz: displacement p_out^T q per force p_in, time factor e^{+i w t}. By superposition of the
  /// modes and, with an absorber, its dynamic stiffness at the point: a way apart from the equations of motion above.
  std::complex<double> receptance(std::span<const double> out, std::span<const double> in, double frequency_hz) const;
  /// Displacement of the absorber's mass relative to its point, per displacement of the point: r^2 / (1 - r^2 + 2 i z
  /// r) with r the frequency over the absorber's own.
  std::complex<double> relative_travel(double frequency_hz) const;

 private:
  void fit(const FittedAbsorber& absorber, const Point& point);

  std::vector<Body> bodies_;
  std::vector<double> mass_;
  numeric::Matrix damping_;
  numeric::Matrix stiffness_;
  std::vector<NaturalMode> modes_;
  std::optional<FittedAbsorber> absorber_;
  std::vector<double> absorber_pattern_;
};

}  // namespace stillmass::simulate
