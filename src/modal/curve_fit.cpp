#include "stillmass/modal/curve_fit.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/least_squares.hpp"

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;
constexpr double two_pi = 2.0 * std::numbers::pi;
constexpr double largest_damping = 0.5;
constexpr std::size_t residual_terms = 3;

/// Where the unknowns stand: frequency and damping of each mode, then for each response a and b of each mode and the
/// two residual terms.
struct Layout {
  std::size_t modes;
  std::size_t responses;

  std::size_t frequency(std::size_t r) const { return 2 * r; }
  std::size_t damping(std::size_t r) const { return 2 * r + 1; }
  std::size_t linear() const { return 2 * modes + residual_terms; }
  std::size_t response(std::size_t p) const { return 2 * modes + p * linear(); }
  std::size_t a(std::size_t p, std::size_t r) const { return response(p) + 2 * r; }
  std::size_t b(std::size_t p, std::size_t r) const { return response(p) + 2 * r + 1; }
  std::size_t residual(std::size_t p) const { return response(p) + 2 * modes; }
  std::size_t unknowns() const { return response(responses); }
};

class Model {
 public:
  Model(std::span<const double> frequency_hz, std::span<const MeasuredResponse> responses, std::size_t modes,
        double decay_per_s)
      : layout{modes, responses.size()}, responses_(responses) {
    for (const double f : frequency_hz) s_.emplace_back(decay_per_s, two_pi * f);
    for (const Complex s : s_) scale_s = std::max(scale_s, std::abs(s));
  }

  std::size_t residual_count() const { return 2 * s_.size() * responses_.size(); }

  /// a and b of every mode and the residual terms at the poles in `x`, by linear least squares.
  void solve_linear(std::vector<double>& x) const {
    for (std::size_t p = 0; p < responses_.size(); ++p) {
      numeric::Matrix design(2 * s_.size(), layout.linear());
      std::vector<double> right(2 * s_.size());
      for (std::size_t k = 0; k < s_.size(); ++k) {
        const double weight = 1.0 / responses_[p].u[k];
        const Complex s = s_[k];
        const auto put = [&](std::size_t column, Complex basis) {
          design(2 * k, column) = weight * basis.real();
          design(2 * k + 1, column) = weight * basis.imag();
        };
        for (std::size_t r = 0; r < layout.modes; ++r) {
          const double w = two_pi * x[layout.frequency(r)];
          const Complex basis = s * s / (s * s + 2.0 * x[layout.damping(r)] * w * s + w * w);
          put(2 * r, basis);
          put(2 * r + 1, basis * s / w);
        }
        for (std::size_t i = 0; i < residual_terms; ++i) put(2 * layout.modes + i, residual_basis(s, i));
        right[2 * k] = weight * responses_[p].accelerance[k].real();
        right[2 * k + 1] = weight * responses_[p].accelerance[k].imag();
      }
      const numeric::LinearFit fit = numeric::least_squares(design, right);
      std::ranges::copy(fit.x, x.begin() + static_cast<std::ptrdiff_t>(layout.response(p)));
    }
  }

  void residual(std::span<const double> x, std::span<double> out) const {
    std::size_t row = 0;
    for (std::size_t p = 0; p < responses_.size(); ++p) {
      for (std::size_t k = 0; k < s_.size(); ++k, row += 2) {
        const Complex s = s_[k];
        Complex sum = -responses_[p].accelerance[k];
        for (std::size_t i = 0; i < residual_terms; ++i) sum += x[layout.residual(p) + i] * residual_basis(s, i);
        for (std::size_t r = 0; r < layout.modes; ++r) {
          const double w = two_pi * x[layout.frequency(r)];
          sum += s * s * (x[layout.a(p, r)] + x[layout.b(p, r)] * s / w) /
                 (s * s + 2.0 * x[layout.damping(r)] * w * s + w * w);
        }
        const Complex misfit = sum / responses_[p].u[k];
        out[row] = misfit.real();
        out[row + 1] = misfit.imag();
      }
    }
  }

  void jacobian(std::span<const double> x, numeric::Matrix& j) const {
    std::size_t row = 0;
    for (std::size_t p = 0; p < responses_.size(); ++p) {
      for (std::size_t k = 0; k < s_.size(); ++k, row += 2) {
        const Complex s = s_[k];
        const double weight = 1.0 / responses_[p].u[k];
        const auto put = [&](std::size_t column, Complex slope) {
          j(row, column) = weight * slope.real();
          j(row + 1, column) = weight * slope.imag();
        };
        for (std::size_t r = 0; r < layout.modes; ++r) {
          const double w = two_pi * x[layout.frequency(r)];
          const double z = x[layout.damping(r)];
          const Complex d = s * s + 2.0 * z * w * s + w * w;
          const Complex basis = s * s / d;
          const Complex term = basis * (x[layout.a(p, r)] + x[layout.b(p, r)] * s / w);
          put(layout.frequency(r),
              two_pi * (-term * (2.0 * z * s + 2.0 * w) / d - basis * x[layout.b(p, r)] * s / (w * w)));
          put(layout.damping(r), -term * 2.0 * w * s / d);
          put(layout.a(p, r), basis);
          put(layout.b(p, r), basis * s / w);
        }
        for (std::size_t i = 0; i < residual_terms; ++i) put(layout.residual(p) + i, residual_basis(s, i));
      }
    }
  }

  Layout layout;
  double scale_s = 0.0;

 private:
  Complex residual_basis(Complex s, std::size_t i) const { return std::pow(s / scale_s, static_cast<int>(i)); }

  std::span<const MeasuredResponse> responses_;
  std::vector<Complex> s_;
};

void check(std::span<const double> frequency_hz, std::span<const MeasuredResponse> responses,
           std::span<const FrequencyAndDamping> start) {
  const auto require = [](bool holds, const char* what) {
    if (!holds) throw base::Error(base::ErrorKind::internal, "modal/curve_fit", what);
  };
  require(!responses.empty() && !start.empty(), "a fit needs a response and a start");
  for (const MeasuredResponse& response : responses) {
    require(response.accelerance.size() == frequency_hz.size() && response.u.size() == frequency_hz.size(),
            "the lengths do not fit");
    require(std::ranges::all_of(response.u, [](double u) { return u > 0.0; }), "an uncertainty is not > 0");
  }
}

/// Gradient of |strength| in the fit's unknowns, as pairs of place and slope.
struct Gradient {
  std::array<std::size_t, 2> place;
  std::array<double, 2> slope;
};

double covariance(const numeric::Matrix& c, const Gradient& left, const Gradient& right) {
  double sum = 0.0;
  for (std::size_t i = 0; i < 2; ++i) {
    for (std::size_t j = 0; j < 2; ++j) sum += left.slope[i] * right.slope[j] * c(left.place[i], right.place[j]);
  }
  return sum;
}

FittedMode mode_of(const numeric::NonlinearFit& fit, const Layout& layout, std::size_t r) {
  const std::vector<double>& x = fit.parameters;
  FittedMode mode;
  mode.system = {x[layout.frequency(r)], x[layout.damping(r)]};
  mode.frequency_u = fit.u(layout.frequency(r));
  mode.damping_u = fit.u(layout.damping(r));
  mode.settled = !fit.at_bound[layout.frequency(r)] && !fit.at_bound[layout.damping(r)];
  const double z = mode.system.damping_ratio;
  const Complex pole(-z, std::sqrt(1.0 - z * z));
  for (std::size_t p = 0; p < layout.responses; ++p) {
    const Complex strength = x[layout.a(p, r)] + x[layout.b(p, r)] * pole;
    const Complex direction = std::abs(strength) > 0.0 ? strength / std::abs(strength) : Complex(1.0);
    const Gradient size{{layout.a(p, r), layout.b(p, r)},
                        {direction.real(), direction.real() * pole.real() + direction.imag() * pole.imag()}};
    mode.strength.push_back(strength);
    mode.strength_u.push_back(std::sqrt(std::max(0.0, covariance(fit.covariance, size, size))));
    if (p > 0) continue;
    // The mass falls as the strength rises.
    const std::array<Gradient, 3> of{Gradient{{layout.frequency(r), 0}, {1.0, 0.0}},
                                     Gradient{{layout.damping(r), 0}, {1.0, 0.0}},
                                     Gradient{size.place, {-size.slope[0], -size.slope[1]}}};
    for (std::size_t i = 0; i < 3; ++i) {
      for (std::size_t j = 0; j < 3; ++j) {
        const double scale =
            std::sqrt(covariance(fit.covariance, of[i], of[i]) * covariance(fit.covariance, of[j], of[j]));
        const double value = scale > 0.0 ? covariance(fit.covariance, of[i], of[j]) / scale : 0.0;
        mode.correlation[i][j] = i == j ? 1.0 : std::clamp(value, -1.0, 1.0);
      }
    }
  }
  return mode;
}

}  // namespace

std::complex<double> CurveFit::accelerance(std::size_t response, std::complex<double> s) const {
  Complex sum = residuals[response].at(s / scale_s);
  for (const FittedMode& mode : modes) {
    const double z = mode.system.damping_ratio;
    const double w = two_pi * mode.system.frequency_hz;
    const double b = mode.strength[response].imag() / std::sqrt(1.0 - z * z);
    const double a = mode.strength[response].real() + z * b;
    sum += s * s * (a + b * s / w) / (s * s + 2.0 * z * w * s + w * w);
  }
  return sum;
}

base::Answer<CurveFit> curve_fit(std::span<const double> frequency_hz, std::span<const MeasuredResponse> responses,
                                 std::span<const FrequencyAndDamping> start, double decay_per_s) {
  check(frequency_hz, responses, start);
  const Model model(frequency_hz, responses, start.size(), decay_per_s);
  const Layout& layout = model.layout;
  if (model.residual_count() <= layout.unknowns()) {
    return base::Refusal{
        "no-fit",
        "there are " + std::to_string(frequency_hz.size()) + " lines for " + std::to_string(start.size()) + " modes",
        "record longer blocks, or widen the band"};
  }

  std::vector<double> x(layout.unknowns(), 0.0);
  numeric::FitOptions options;
  options.lower.assign(x.size(), -std::numeric_limits<double>::infinity());
  options.upper.assign(x.size(), std::numeric_limits<double>::infinity());
  options.tolerance = 1e-10;
  for (std::size_t r = 0; r < start.size(); ++r) {
    x[layout.frequency(r)] = start[r].frequency_hz;
    x[layout.damping(r)] = start[r].damping_ratio;
    options.lower[layout.frequency(r)] = 0.5 * start[r].frequency_hz;
    options.upper[layout.frequency(r)] = 2.0 * start[r].frequency_hz;
    options.lower[layout.damping(r)] = 0.0;
    options.upper[layout.damping(r)] = largest_damping;
  }
  model.solve_linear(x);

  const numeric::FitProblem problem{model.residual_count(),
                                    [&](std::span<const double> p, std::span<double> out) { model.residual(p, out); },
                                    [&](std::span<const double> p, numeric::Matrix& j) { model.jacobian(p, j); }};
  const numeric::NonlinearFit fit = numeric::nonlinear_fit(problem, std::move(x), options);
  if (fit.reason == numeric::StopReason::too_many_steps) {
    return base::Refusal{"no-fit", "the curve fit of " + std::to_string(start.size()) + " modes does not settle",
                         "narrow the band to the modes of interest, or strike more often"};
  }

  CurveFit result;
  for (std::size_t r = 0; r < start.size(); ++r) result.modes.push_back(mode_of(fit, layout, r));
  std::ranges::sort(result.modes, {}, [](const FittedMode& mode) { return mode.system.frequency_hz; });
  for (std::size_t p = 0; p < responses.size(); ++p) {
    const double* terms = &fit.parameters[layout.residual(p)];
    result.residuals.push_back({terms[0], terms[1], terms[2]});
  }
  result.scale_s = model.scale_s;
  result.chi_square_per_dof = fit.residual_sum / fit.dof;
  result.dof = fit.dof;
  result.reason = fit.reason;
  return result;
}

}  // namespace stillmass::modal
