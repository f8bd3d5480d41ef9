#include "stillmass/simulate/skid.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/decomposition.hpp"

namespace stillmass::simulate {
namespace {

constexpr double two_pi = 2.0 * std::numbers::pi;
constexpr std::size_t dofs_per_body = 6;

// a += factor * v v^T
void add_outer(numeric::Matrix& a, std::span<const double> v, double factor) {
  for (std::size_t i = 0; i < v.size(); ++i) {
    for (std::size_t j = 0; j < v.size(); ++j) a(i, j) += factor * v[i] * v[j];
  }
}

double dot(std::span<const double> a, std::span<const double> b) {
  double sum = 0.0;
  for (std::size_t i = 0; i < std::min(a.size(), b.size()); ++i) sum += a[i] * b[i];
  return sum;
}

std::vector<double> masses_of(const std::vector<Body>& bodies) {
  std::vector<double> mass;
  for (const Body& body : bodies) {
    mass.insert(mass.end(), 3, body.mass_kg);
    mass.insert(mass.end(), body.inertia_kg_m2.begin(), body.inertia_kg_m2.end());
  }
  return mass;
}

std::vector<NaturalMode> modes_of(const numeric::Matrix& stiffness, std::span<const double> mass,
                                  const std::vector<double>& damping_ratios) {
  numeric::Matrix mass_matrix(mass.size(), mass.size());
  for (std::size_t i = 0; i < mass.size(); ++i) mass_matrix(i, i) = mass[i];
  const auto eigen = numeric::eigen_symmetric(stiffness, mass_matrix);
  std::vector<NaturalMode> modes(mass.size());
  for (std::size_t r = 0; r < modes.size(); ++r) {
    modes[r].frequency_hz = std::sqrt(std::max(eigen.values[r], 0.0)) / two_pi;
    modes[r].damping_ratio = damping_ratios[std::min(r, damping_ratios.size() - 1)];
    for (std::size_t i = 0; i < mass.size(); ++i) modes[r].shape.push_back(eigen.vectors(i, r));
  }
  return modes;
}

numeric::Matrix modal_damping(const std::vector<NaturalMode>& modes, std::span<const double> mass) {
  numeric::Matrix damping(mass.size(), mass.size());
  for (const NaturalMode& mode : modes) {
    std::vector<double> momentum(mass.size());
    for (std::size_t i = 0; i < mass.size(); ++i) momentum[i] = mass[i] * mode.shape[i];
    add_outer(damping, momentum, 2.0 * mode.damping_ratio * two_pi * mode.frequency_hz);
  }
  return damping;
}

numeric::Matrix enlarged(const numeric::Matrix& a) {
  numeric::Matrix out(a.rows() + 1, a.columns() + 1);
  for (std::size_t i = 0; i < a.rows(); ++i) std::ranges::copy(a.row(i), out.row(i).begin());
  return out;
}

}  // namespace

Skid::Skid(const SkidFile& file, Condition condition, bool fitted)
    : bodies_(file.bodies),
      mass_(masses_of(file.bodies)),
      stiffness_(file.bodies.size() * dofs_per_body, file.bodies.size() * dofs_per_body) {
  const double shift = condition == Condition::running ? 1.0 + file.running_shift : 1.0;
  for (const Spring& spring : file.springs) {
    for (std::size_t axis = 0; axis < 3; ++axis) {
      Vector3 direction{};
      direction[axis] = 1.0;
      auto stretch = pattern(spring.body, spring.at_m, direction);
      double stiffness = spring.stiffness_n_per_m[axis];
      if (spring.other) {
        const auto other = pattern(*spring.other, spring.at_m, direction);
        for (std::size_t i = 0; i < stretch.size(); ++i) stretch[i] -= other[i];
      } else {
        stiffness *= shift * shift;
      }
      add_outer(stiffness_, stretch, stiffness);
    }
  }
  modes_ = modes_of(stiffness_, mass_, file.damping_ratios);
  if (modes_.front().frequency_hz < 0.1) {
    throw base::usage_error(file.name, "a body is not held by the springs",
                            "give every body springs in all directions");
  }
  damping_ = modal_damping(modes_, mass_);
  if (fitted) {
    if (!file.absorber) throw base::usage_error(file.name, "there is no absorber to be fitted", "add [absorber]");
    fit(*file.absorber, file.points[file.absorber->point]);
  }
}

void Skid::fit(const FittedAbsorber& absorber, const Point& point) {
  absorber_ = absorber;
  absorber_pattern_ = pattern(point);
  auto stretch = absorber_pattern_;
  stretch.push_back(-1.0);
  mass_.push_back(absorber.mass_kg);
  const double omega = two_pi * absorber.frequency_hz;
  stiffness_ = enlarged(stiffness_);
  damping_ = enlarged(damping_);
  add_outer(stiffness_, stretch, absorber.mass_kg * omega * omega);
  add_outer(damping_, stretch, 2.0 * absorber.damping_ratio * absorber.mass_kg * omega);
}

std::vector<double> Skid::pattern(std::size_t body, const Vector3& at_m, const Vector3& direction) const {
  const Vector3& centre = bodies_[body].centre_m;
  const Vector3 arm{at_m[0] - centre[0], at_m[1] - centre[1], at_m[2] - centre[2]};
  // A small rotation moves the place by rotation x arm; along the direction: rotation . (arm x direction).
  const Vector3 moment{arm[1] * direction[2] - arm[2] * direction[1], arm[2] * direction[0] - arm[0] * direction[2],
                       arm[0] * direction[1] - arm[1] * direction[0]};
  std::vector<double> p(dofs(), 0.0);
  const auto begin = p.begin() + static_cast<std::ptrdiff_t>(body * dofs_per_body);
  std::ranges::copy(moment, std::ranges::copy(direction, begin).out);
  return p;
}

std::complex<double> Skid::receptance(std::span<const double> out, std::span<const double> in,
                                      double frequency_hz) const {
  const double omega = two_pi * frequency_hz;
  std::complex<double> bare = 0.0;
  std::complex<double> to_absorber = 0.0;
  std::complex<double> from_absorber = 0.0;
  std::complex<double> at_absorber = 0.0;
  for (const NaturalMode& mode : modes_) {
    const double omega_r = two_pi * mode.frequency_hz;
    const std::complex<double> stiffness{omega_r * omega_r - omega * omega, 2.0 * mode.damping_ratio * omega_r * omega};
    const double at_out = dot(out, mode.shape);
    const double at_in = dot(in, mode.shape);
    bare += at_out * at_in / stiffness;
    if (absorber_) {
      const double at_point = dot(absorber_pattern_, mode.shape);
      to_absorber += at_point * at_in / stiffness;
      from_absorber += at_out * at_point / stiffness;
      at_absorber += at_point * at_point / stiffness;
    }
  }
  if (!absorber_) return bare;
  // On a moving point the absorber pulls back with its mass times its own absolute acceleration.
  const std::complex<double> dynamic_stiffness =
      -absorber_->mass_kg * omega * omega * (1.0 + relative_travel(frequency_hz));
  return bare - from_absorber * dynamic_stiffness * to_absorber / (1.0 + dynamic_stiffness * at_absorber);
}

std::complex<double> Skid::relative_travel(double frequency_hz) const {
  if (!absorber_) throw base::Error(base::ErrorKind::internal, "skid", "no absorber is fitted");
  const double r = frequency_hz / absorber_->frequency_hz;
  return r * r / std::complex<double>{1.0 - r * r, 2.0 * absorber_->damping_ratio * r};
}

}  // namespace stillmass::simulate
