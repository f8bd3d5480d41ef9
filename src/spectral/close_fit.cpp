#include "spectral/close_fit.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>
#include <optional>

#include "stillmass/numeric/decomposition.hpp"

#include "spectral/fft.hpp"

namespace stillmass::spectral {

namespace {

using Complex = std::complex<double>;
constexpr std::size_t parabola = 3;

/// sin(pi d) / (n sin(pi d / n)) and its derivative by d.
struct Kernel {
  double value = 1.0;
  double slope = 0.0;
};

Kernel kernel(double d, double n) {
  constexpr double pi = std::numbers::pi;
  if (std::abs(d) < 1e-4) return {1.0 - pi * pi * d * d / 6.0, -pi * pi * d / 3.0};
  const double s = std::sin(pi * d);
  const double below = n * std::sin(pi * d / n);
  return {s / below, pi * (std::cos(pi * d) - s / below * std::cos(pi * d / n)) / below};
}

/// The linear part at given places: columns (real), Gram matrix, amplitudes, residual.
struct Linear {
  std::vector<std::vector<double>> columns;  ///< kernels, then 1, v, v^2 with v from -1 to 1
  std::vector<std::vector<double>> slopes;   ///< of the kernels by place
  numeric::Matrix inverse;
  std::vector<Complex> x;
  std::vector<Complex> residual;
  double sum = 0.0;
};

double dot(std::span<const double> a, std::span<const double> b) {
  return std::inner_product(a.begin(), a.end(), b.begin(), 0.0);
}

Complex dot(std::span<const double> a, std::span<const Complex> b) {
  return std::inner_product(b.begin(), b.end(), a.begin(), Complex{});
}

std::optional<Linear> linear_at(const CloseLines& lines, std::span<const double> places) {
  const std::size_t count = lines.z.size();
  const std::size_t tones = places.size();
  const std::size_t unknowns = tones + parabola;
  Linear result;
  result.columns.assign(unknowns, std::vector<double>(count));
  result.slopes.assign(tones, std::vector<double>(count));
  const double middle = 0.5 * (lines.number(0) + lines.number(count - 1));
  const double half = std::max(0.5 * static_cast<double>(count - 1), 1.0);
  for (std::size_t i = 0; i < count; ++i) {
    for (std::size_t j = 0; j < tones; ++j) {
      const Kernel k = kernel(places[j] - lines.number(i), static_cast<double>(lines.samples));
      result.columns[j][i] = k.value;
      result.slopes[j][i] = k.slope;
    }
    const double v = (lines.number(i) - middle) / half;
    // A line's sign turns from one to the next as that of a side lobe does: the parabola is of the lobes' heights.
    const double sign = (lines.first + static_cast<std::int64_t>(i)) % 2 == 0 ? 1.0 : -1.0;
    result.columns[tones][i] = sign;
    result.columns[tones + 1][i] = sign * v;
    result.columns[tones + 2][i] = sign * v * v;
  }
  numeric::Matrix gram(unknowns, unknowns);
  for (std::size_t a = 0; a < unknowns; ++a) {
    for (std::size_t b = 0; b <= a; ++b) gram(a, b) = gram(b, a) = dot(result.columns[a], result.columns[b]);
  }
  auto inverse = numeric::inverse_positive_definite(gram);
  if (!inverse) return std::nullopt;
  result.inverse = std::move(*inverse);
  std::vector<Complex> projection(unknowns);
  for (std::size_t a = 0; a < unknowns; ++a) projection[a] = dot(result.columns[a], lines.z);
  result.x.assign(unknowns, {});
  result.residual = lines.z;
  for (std::size_t a = 0; a < unknowns; ++a) {
    for (std::size_t b = 0; b < unknowns; ++b) result.x[a] += result.inverse(a, b) * projection[b];
    for (std::size_t i = 0; i < count; ++i) result.residual[i] -= result.x[a] * result.columns[a][i];
  }
  for (const Complex& r : result.residual) result.sum += std::norm(r);
  return std::isfinite(result.sum) ? std::optional<Linear>(std::move(result)) : std::nullopt;
}

/// The part of each slope that amplitudes cannot make good, and what they do: slope = sum of share * column + rest.
struct Slopes {
  std::vector<std::vector<double>> rest;
  std::vector<std::vector<double>> share;
  numeric::Matrix normal;  ///< Re(conj(A_i) A_j) rest_i . rest_j
};

Slopes slopes_of(const Linear& at) {
  const std::size_t tones = at.slopes.size();
  const std::size_t unknowns = at.columns.size();
  Slopes s{at.slopes, std::vector<std::vector<double>>(tones, std::vector<double>(unknowns)),
           numeric::Matrix(tones, tones)};
  for (std::size_t j = 0; j < tones; ++j) {
    std::vector<double> projection(unknowns);
    for (std::size_t a = 0; a < unknowns; ++a) projection[a] = dot(at.columns[a], at.slopes[j]);
    for (std::size_t a = 0; a < unknowns; ++a) {
      for (std::size_t b = 0; b < unknowns; ++b) s.share[j][a] += at.inverse(a, b) * projection[b];
      for (std::size_t i = 0; i < s.rest[j].size(); ++i) s.rest[j][i] -= s.share[j][a] * at.columns[a][i];
    }
  }
  for (std::size_t i = 0; i < tones; ++i) {
    for (std::size_t j = 0; j < tones; ++j) {
      s.normal(i, j) = (std::conj(at.x[i]) * at.x[j]).real() * dot(s.rest[i], s.rest[j]);
    }
  }
  return s;
}

/// The places moved to where the sum of squares is least: Gauss-Newton on the places alone, the amplitudes being
/// linear (variable projection: Golub & Pereyra 1973; Kaufman's simplification 1975; from memory), damped.
std::optional<Linear> refined(const CloseLines& lines, std::vector<double>& places) {
  constexpr int most_steps = 60;
  constexpr double settled = 1e-7;  // lines
  auto now = linear_at(lines, places);
  double damping = 1e-3;
  for (int step = 0; now && step < most_steps; ++step) {
    const Slopes s = slopes_of(*now);
    numeric::Matrix damped = s.normal;
    std::vector<double> gradient(places.size());
    for (std::size_t j = 0; j < places.size(); ++j) {
      gradient[j] = (std::conj(now->x[j]) * dot(s.rest[j], now->residual)).real();
      damped(j, j) *= 1.0 + damping;
    }
    const auto move = numeric::solve_positive_definite(damped, gradient);
    if (!move) break;
    double largest = 0.0;
    std::vector<double> there = places;
    for (std::size_t j = 0; j < places.size(); ++j) {
      there[j] += std::clamp((*move)[j], -1.0, 1.0);
      there[j] = std::clamp(there[j], lines.number(0), lines.number(lines.z.size() - 1));
      largest = std::max(largest, std::abs(there[j] - places[j]));
    }
    auto then = linear_at(lines, there);
    if (then && then->sum <= now->sum) {
      places = std::move(there);
      now = std::move(then);
      damping = std::max(damping * 0.1, 1e-12);
      if (largest < settled) break;
    } else {
      if (largest < settled) break;
      damping = std::max(damping * 10.0, 1e-3);
      if (damping > 1e8) break;
    }
  }
  return now;
}

CloseFit made(const Linear& at, const std::vector<double>& places) {
  std::vector<std::size_t> order(places.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](auto a, auto b) { return places[a] < places[b]; });
  CloseFit fit;
  fit.residual = at.residual;
  fit.residual_sum = at.sum;
  const Slopes s = slopes_of(at);
  const auto inverse = places.empty() ? std::nullopt : numeric::inverse_positive_definite(s.normal);
  const double huge = 1e30;
  for (const std::size_t j : order) {
    const Complex a = at.x[j];
    fit.place.push_back(places[j]);
    fit.amplitude.push_back(a);
    if (!inverse || std::abs(a) == 0.0) {
      for (auto* v : {&fit.place_variance, &fit.amplitude_variance, &fit.phase_variance}) v->push_back(huge);
      continue;
    }
    fit.place_variance.push_back(0.5 * (*inverse)(j, j));
    // dA_j / d place_i = -share_ij A_i, along A_j and across it.
    double along = 0.5 * at.inverse(j, j);
    double across = along;
    std::vector<Complex> slope(places.size());
    for (std::size_t i = 0; i < places.size(); ++i) slope[i] = -s.share[i][j] * at.x[i] * std::conj(a) / std::abs(a);
    for (std::size_t i = 0; i < places.size(); ++i) {
      for (std::size_t k = 0; k < places.size(); ++k) {
        along += 0.5 * (*inverse)(i, k) * slope[i].real() * slope[k].real();
        across += 0.5 * (*inverse)(i, k) * slope[i].imag() * slope[k].imag();
      }
    }
    fit.amplitude_variance.push_back(along);
    fit.phase_variance.push_back(across / std::norm(a));
  }
  return fit;
}

/// Where one more tone takes most away from a residual: the highest maxima, a quarter of a line apart at least.
std::vector<double> likely_places(const CloseLines& lines, std::span<const Complex> residual, std::size_t count) {
  constexpr int parts = 4;
  constexpr int reach = 6;  // lines whose share counts
  const auto steps = static_cast<int>(lines.z.size() - 1) * parts + 1;
  std::vector<double> power(static_cast<std::size_t>(steps));
  for (int i = 0; i < steps; ++i) {
    Complex sum;
    for (int k = std::max(0, i / parts - reach); k <= std::min((steps - 1) / parts, i / parts + reach); ++k) {
      const double d = static_cast<double>(i) / parts - k;
      sum += residual[static_cast<std::size_t>(k)] * kernel(d, static_cast<double>(lines.samples)).value;
    }
    power[static_cast<std::size_t>(i)] = std::norm(sum);
  }
  std::vector<int> tops;
  for (int i = 0; i < steps; ++i) {
    const double here = power[static_cast<std::size_t>(i)];
    const bool over_left = i == 0 || here >= power[static_cast<std::size_t>(i - 1)];
    const bool over_right = i + 1 == steps || here > power[static_cast<std::size_t>(i + 1)];
    if (over_left && over_right) tops.push_back(i);
  }
  std::stable_sort(tops.begin(), tops.end(), [&](int a, int b) {
    return power[static_cast<std::size_t>(a)] > power[static_cast<std::size_t>(b)];
  });
  std::vector<double> places;
  for (std::size_t i = 0; i < std::min(count, tops.size()); ++i) {
    places.push_back(lines.number(0) + static_cast<double>(tops[i]) / parts);
  }
  return places;
}

/// Starts for one tone more: beside those there are, or one of them split in two.
std::vector<std::vector<double>> starts(const CloseLines& lines, const CloseFit& before) {
  constexpr double split = 0.6;  // lines to each side
  std::vector<std::vector<double>> all;
  for (const double place : likely_places(lines, before.residual, 3)) {
    all.push_back(before.place);
    all.back().push_back(place);
  }
  for (std::size_t j = 0; j < before.place.size(); ++j) {
    all.push_back(before.place);
    all.back()[j] -= split;
    all.back().push_back(before.place[j] + split);
  }
  return all;
}

}  // namespace

CloseLines close_lines(std::span<const std::complex<double>> samples, std::int64_t lowest, std::int64_t highest) {
  const auto n = static_cast<std::int64_t>(samples.size());
  ComplexFft fft(samples.size());
  std::copy(samples.begin(), samples.end(), fft.values().begin());
  fft.run();
  CloseLines lines;
  lines.samples = samples.size();
  lines.first = lowest;
  for (std::int64_t k = lowest; k <= highest; ++k) {
    const Complex value = fft.values()[static_cast<std::size_t>(((k % n) + n) % n)];
    const double angle =
        std::numbers::pi * static_cast<double>(k) * static_cast<double>(n - 1) / static_cast<double>(n);
    lines.z.push_back(value * std::polar(1.0 / static_cast<double>(n), angle));
  }
  return lines;
}

std::vector<CloseFit> close_fits(const CloseLines& lines, std::size_t most) {
  std::vector<CloseFit> fits;
  const std::size_t unknowns_a_tone = 3;
  const auto none = linear_at(lines, {});
  if (!none) return fits;
  fits.push_back(made(*none, {}));
  for (std::size_t m = 1; m <= most && 2 * lines.z.size() > unknowns_a_tone * m + 2 * parabola + 2; ++m) {
    std::optional<Linear> best;
    std::vector<double> best_places;
    for (std::vector<double> places : starts(lines, fits.back())) {
      auto there = refined(lines, places);
      if (there && (!best || there->sum < best->sum)) {
        best = std::move(there);
        best_places = std::move(places);
      }
    }
    if (!best || !(best->sum < fits.back().residual_sum)) break;
    fits.push_back(made(*best, best_places));
  }
  return fits;
}

}  // namespace stillmass::spectral
