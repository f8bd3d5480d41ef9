#include "stillmass/modal/pencil.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/decomposition.hpp"
#include "stillmass/numeric/least_squares.hpp"
#include "stillmass/numeric/nonlinear_fit.hpp"

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;
constexpr double two_pi = 2.0 * std::numbers::pi;
constexpr std::size_t most_samples = 2000;
constexpr double largest_damping = 0.9;

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "modal/pencil", what);
}

Complex pole(const FrequencyAndDamping& system) {
  const double w = two_pi * system.frequency_hz;
  return {-system.damping_ratio * w, w * std::sqrt(1.0 - system.damping_ratio * system.damping_ratio)};
}

/// The amplitudes that go best with given poles, by linear least squares.
void solve_amplitudes(std::span<const double> samples, double rate_hz, std::vector<DecayingSinusoid>& sinusoids) {
  numeric::Matrix design(samples.size(), 2 * sinusoids.size());
  for (std::size_t r = 0; r < sinusoids.size(); ++r) {
    const Complex p = pole(sinusoids[r].system);
    for (std::size_t k = 0; k < samples.size(); ++k) {
      const Complex e = std::exp(p * (static_cast<double>(k) / rate_hz));
      design(k, 2 * r) = e.real();
      design(k, 2 * r + 1) = -e.imag();
    }
  }
  const numeric::LinearFit fit = numeric::least_squares(design, samples);
  for (std::size_t r = 0; r < sinusoids.size(); ++r) sinusoids[r].amplitude = {fit.x[2 * r], fit.x[2 * r + 1]};
}

/// A step of the signal space: the matrix whose eigenvalues are exp(p / rate).
numeric::Matrix shift_matrix(const numeric::Matrix& v, std::size_t order) {
  const std::size_t rows = v.rows() - 1;
  numeric::Matrix gram(order, order);
  numeric::Matrix cross(order, order);
  for (std::size_t k = 0; k < rows; ++k) {
    for (std::size_t i = 0; i < order; ++i) {
      for (std::size_t j = 0; j < order; ++j) {
        gram(i, j) += v(k, i) * v(k, j);
        cross(i, j) += v(k, i) * v(k + 1, j);
      }
    }
  }
  const auto inverse = numeric::inverse_positive_definite(gram);
  require(inverse.has_value(), "the signal space is short of rank");
  return numeric::product(*inverse, cross);
}

}  // namespace

std::vector<DecayingSinusoid> matrix_pencil(std::span<const double> samples, double rate_hz, std::size_t count) {
  require(count > 0 && rate_hz > 0.0 && samples.size() >= 6 * count && samples.size() <= most_samples,
          "the number of samples does not suit the number of sinusoids");
  const std::size_t columns = samples.size() / 3;
  numeric::Matrix hankel(samples.size() - columns, columns + 1);
  for (std::size_t r = 0; r < hankel.rows(); ++r) {
    std::copy_n(samples.begin() + static_cast<std::ptrdiff_t>(r), columns + 1, hankel.row(r).begin());
  }
  const numeric::SingularValues svd = numeric::singular_values(hankel);

  std::vector<DecayingSinusoid> sinusoids;
  for (const Complex z : numeric::eigenvalues(shift_matrix(svd.v, 2 * count))) {
    if (!(z.imag() > 0.0) || !(std::abs(z) < 1.0)) continue;
    const Complex p = std::log(z) * rate_hz;
    sinusoids.push_back({{std::abs(p) / two_pi, -p.real() / std::abs(p)}, 0.0});
  }
  std::ranges::sort(sinusoids, {}, [](const DecayingSinusoid& s) { return s.system.frequency_hz; });
  if (!sinusoids.empty()) solve_amplitudes(samples, rate_hz, sinusoids);
  return sinusoids;
}

DecayFit fit_decay(std::span<const double> samples, double rate_hz, std::span<const DecayingSinusoid> start) {
  require(!start.empty() && samples.size() > 4 * start.size(), "there are too few samples for the sinusoids");
  std::vector<DecayingSinusoid> sinusoids(start.begin(), start.end());
  solve_amplitudes(samples, rate_hz, sinusoids);

  // Four unknowns a sinusoid: frequency, damping ratio, real and imaginary part of the amplitude.
  std::vector<double> x;
  numeric::FitOptions options;
  options.tolerance = 1e-11;
  for (const DecayingSinusoid& s : sinusoids) {
    x.insert(x.end(), {s.system.frequency_hz, s.system.damping_ratio, s.amplitude.real(), s.amplitude.imag()});
    const double infinity = std::numeric_limits<double>::infinity();
    options.lower.insert(options.lower.end(), {0.5 * s.system.frequency_hz, 0.0, -infinity, -infinity});
    options.upper.insert(options.upper.end(), {2.0 * s.system.frequency_hz, largest_damping, infinity, infinity});
  }
  const auto time = [&](std::size_t k) { return static_cast<double>(k) / rate_hz; };
  const numeric::FitProblem problem{samples.size(),
                                    [&](std::span<const double> p, std::span<double> out) {
                                      for (std::size_t k = 0; k < samples.size(); ++k) out[k] = -samples[k];
                                      for (std::size_t r = 0; r < p.size(); r += 4) {
                                        const Complex s = pole({p[r], p[r + 1]});
                                        const Complex amplitude(p[r + 2], p[r + 3]);
                                        for (std::size_t k = 0; k < samples.size(); ++k)
                                          out[k] += (amplitude * std::exp(s * time(k))).real();
                                      }
                                    },
                                    [&](std::span<const double> p, numeric::Matrix& j) {
                                      for (std::size_t r = 0; r < p.size(); r += 4) {
                                        const double w = two_pi * p[r];
                                        const double root = std::sqrt(1.0 - p[r + 1] * p[r + 1]);
                                        const Complex s = pole({p[r], p[r + 1]});
                                        const Complex by_frequency = two_pi * Complex(-p[r + 1], root);
                                        const Complex by_damping(-w, -w * p[r + 1] / root);
                                        for (std::size_t k = 0; k < samples.size(); ++k) {
                                          const Complex e = std::exp(s * time(k));
                                          const Complex slope = Complex(p[r + 2], p[r + 3]) * e * time(k);
                                          j(k, r) = (slope * by_frequency).real();
                                          j(k, r + 1) = (slope * by_damping).real();
                                          j(k, r + 2) = e.real();
                                          j(k, r + 3) = -e.imag();
                                        }
                                      }
                                    }};
  const numeric::NonlinearFit fit = numeric::nonlinear_fit(problem, std::move(x), options);

  DecayFit result;
  for (std::size_t r = 0; r < fit.parameters.size(); r += 4) {
    result.sinusoids.push_back(
        {{fit.parameters[r], fit.parameters[r + 1]}, {fit.parameters[r + 2], fit.parameters[r + 3]}});
    result.frequency_u.push_back(fit.u(r));
    result.damping_u.push_back(fit.u(r + 1));
  }
  result.residual_rms = std::sqrt(fit.residual_sum / static_cast<double>(samples.size()));
  return result;
}

}  // namespace stillmass::modal
