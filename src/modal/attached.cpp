#include "stillmass/modal/attached.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "stillmass/numeric/decomposition.hpp"

namespace stillmass::modal {
namespace {

double angular(double f_hz) { return 2.0 * std::numbers::pi * f_hz; }

}  // namespace

double OneMode::stiffness() const { return modal_mass_kg * angular(frequency_hz) * angular(frequency_hz); }

std::complex<double> OneMode::receptance(double f_hz) const {
  const double w1 = angular(frequency_hz);
  const double w = angular(f_hz);
  return 1.0 / (modal_mass_kg * std::complex<double>(w1 * w1 - w * w, 2.0 * damping_ratio * w1 * w));
}

std::optional<OneMode> plain(const Mode& mode) {
  if (!mode.modal_mass) return {};
  return OneMode{mode.frequency.value, mode.damping_ratio.value, mode.modal_mass->value};
}

std::complex<double> RigidMass::dynamic_stiffness(double f_hz) const {
  return -mass_kg * angular(f_hz) * angular(f_hz);
}

double SprungMass::stiffness() const { return mass_kg * angular(frequency_hz) * angular(frequency_hz); }

double SprungMass::damping_constant() const { return 2.0 * damping_ratio * mass_kg * angular(frequency_hz); }

std::complex<double> SprungMass::dynamic_stiffness(double f_hz) const {
  const double w = angular(f_hz);
  const std::complex<double> spring(stiffness(), w * damping_constant());
  return -mass_kg * w * w * spring / (spring - mass_kg * w * w);
}

std::complex<double> SprungMass::relative_motion(double f_hz) const {
  const double w = angular(f_hz);
  const std::complex<double> spring(stiffness(), w * damping_constant());
  return mass_kg * w * w / (spring - mass_kg * w * w);
}

std::complex<double> response_ratio(std::complex<double> receptance, std::complex<double> dynamic_stiffness) {
  return 1.0 / (1.0 + receptance * dynamic_stiffness);
}

std::vector<std::complex<double>> receptance_with(std::span<const std::complex<double>> receptance, double line_hz,
                                                  const SprungMass& attached) {
  std::vector<std::complex<double>> with(receptance.begin(), receptance.end());
  for (std::size_t k = 1; k < with.size(); ++k) {
    with[k] *= response_ratio(with[k], attached.dynamic_stiffness(static_cast<double>(k) * line_hz));
  }
  return with;
}

double frequency_with(const OneMode& mode, const RigidMass& attached) {
  return mode.frequency_hz / std::sqrt(1.0 + attached.mass_kg / mode.modal_mass_kg);
}

std::array<double, 2> split_frequencies(const OneMode& mode, const SprungMass& attached) {
  const double tuning = attached.frequency_hz / mode.frequency_hz;
  const double product = tuning * tuning;
  const double half_sum = 0.5 * (1.0 + product * (1.0 + attached.mass_kg / mode.modal_mass_kg));
  const double upper = half_sum + std::sqrt(std::max(0.0, half_sum * half_sum - product));
  return {mode.frequency_hz * std::sqrt(product / upper), mode.frequency_hz * std::sqrt(upper)};
}

std::array<DampedSplit, 2> damped_splits(const OneMode& mode, const SprungMass& attached) {
  // In units of f1: (1 + 2 z p + p^2)(t + c p + p^2) + mu p^2 (t + c p) = 0, p = i w / w1.
  const double mu = attached.mass_kg / mode.modal_mass_kg;
  const double tuning = attached.frequency_hz / mode.frequency_hz;
  const double t = tuning * tuning;
  const double c = 2.0 * attached.damping_ratio * tuning;
  const double z = 2.0 * mode.damping_ratio;
  const std::array<std::complex<double>, 5> coefficients{t, c + z * t, 1.0 + t * (1.0 + mu) + z * c, c * (1.0 + mu) + z,
                                                         1.0};
  const auto pole_pair = [&](const std::complex<double>& a, const std::complex<double>& b) {
    const double frequency = std::sqrt(std::abs(a * b));
    return DampedSplit{mode.frequency_hz * frequency, -0.5 * (a + b).real() / frequency};
  };
  std::vector<DampedSplit> pairs;
  std::vector<std::complex<double>> real;  // of an overdamped pair
  for (const auto& root : numeric::polynomial_roots(coefficients)) {
    if (std::abs(root.imag()) <= 1e-9 * std::abs(root)) {
      real.push_back(root);
    } else if (root.imag() > 0.0) {
      pairs.push_back(pole_pair(root, std::conj(root)));
    }
  }
  std::sort(real.begin(), real.end(), [](const auto& a, const auto& b) { return a.real() < b.real(); });
  for (std::size_t i = 0; i + 1 < real.size(); i += 2) pairs.push_back(pole_pair(real[i], real[i + 1]));
  std::sort(pairs.begin(), pairs.end(),
            [](const DampedSplit& a, const DampedSplit& b) { return a.frequency_hz < b.frequency_hz; });
  return {pairs.at(0), pairs.at(1)};
}

std::optional<double> modal_mass_from_split(double f1_hz, const SprungMass& attached, double split_hz) {
  const double s = split_hz * split_hz;
  const double a = attached.frequency_hz * attached.frequency_hz;
  const double product = (a - s) * (f1_hz * f1_hz - s);
  if (!(product > 0.0)) return {};
  return attached.mass_kg * s * a / product;
}

std::optional<OneMode> machine_from_splits(std::array<double, 2> splits_hz, const SprungMass& attached) {
  if (!(splits_hz[0] < attached.frequency_hz && attached.frequency_hz < splits_hz[1])) return {};
  const double f1 = splits_hz[0] * splits_hz[1] / attached.frequency_hz;
  const auto mass = modal_mass_from_split(f1, attached, splits_hz[0]);
  if (!mass) return {};
  return OneMode{f1, 0.0, *mass};
}

}  // namespace stillmass::modal
