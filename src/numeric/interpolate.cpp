#include "stillmass/numeric/interpolate.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <numbers>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/fir.hpp"

namespace stillmass::numeric {
namespace {

base::Error fault(const char* what) { return {base::ErrorKind::internal, "interpolation", what}; }

// Slope at an end from the two chords next to it, kept from overshooting.
double end_slope(double near_width, double far_width, double near_chord, double far_chord) {
  const double slope =
      ((2.0 * near_width + far_width) * near_chord - near_width * far_chord) / (near_width + far_width);
  if (slope * near_chord <= 0.0) return 0.0;
  if (near_chord * far_chord <= 0.0 && std::abs(slope) > 3.0 * std::abs(near_chord)) return 3.0 * near_chord;
  return slope;
}

constexpr std::size_t nodes_per_crossing = 1024;

}  // namespace

double linear(std::span<const double> x, std::span<const double> y, double at) {
  if (x.empty() || x.size() != y.size()) throw fault("knots and values differ in number, or there are none");
  if (at <= x.front()) return y.front();
  if (at >= x.back()) return y.back();
  const auto right = static_cast<std::size_t>(std::upper_bound(x.begin(), x.end(), at) - x.begin());
  const double fraction = (at - x[right - 1]) / (x[right] - x[right - 1]);
  return y[right - 1] + fraction * (y[right] - y[right - 1]);
}

MonotoneCubic::MonotoneCubic(std::vector<double> x, std::vector<double> y) : x_(std::move(x)), y_(std::move(y)) {
  const std::size_t n = x_.size();
  if (n < 2 || y_.size() != n) throw fault("fewer than two knots, or values differ in number");
  std::vector<double> width(n - 1);
  std::vector<double> chord(n - 1);
  for (std::size_t i = 0; i + 1 < n; ++i) {
    width[i] = x_[i + 1] - x_[i];
    if (!(width[i] > 0.0) || !std::isfinite(y_[i]) || !std::isfinite(y_[i + 1])) throw fault("knots do not ascend");
    chord[i] = (y_[i + 1] - y_[i]) / width[i];
  }
  slope_.assign(n, chord.front());
  if (n == 2) return;
  for (std::size_t i = 1; i + 1 < n; ++i) {
    const double left = 2.0 * width[i] + width[i - 1];
    const double right = width[i] + 2.0 * width[i - 1];
    const bool same_sense = chord[i - 1] * chord[i] > 0.0;
    slope_[i] = same_sense ? (left + right) / (left / chord[i - 1] + right / chord[i]) : 0.0;
  }
  slope_.front() = end_slope(width[0], width[1], chord[0], chord[1]);
  slope_.back() = end_slope(width[n - 2], width[n - 3], chord[n - 2], chord[n - 3]);
}

std::size_t MonotoneCubic::piece(double at) const {
  const auto right = static_cast<std::size_t>(std::upper_bound(x_.begin(), x_.end(), at) - x_.begin());
  return std::clamp<std::size_t>(right, 1, x_.size() - 1) - 1;
}

double MonotoneCubic::value(double at) const {
  if (at <= x_.front()) return y_.front() + slope_.front() * (at - x_.front());
  if (at >= x_.back()) return y_.back() + slope_.back() * (at - x_.back());
  const std::size_t i = piece(at);
  const double width = x_[i + 1] - x_[i];
  const double t = (at - x_[i]) / width;
  const double rise = y_[i + 1] - y_[i];
  const double a = slope_[i] * width;
  const double b = slope_[i + 1] * width;
  return y_[i] + t * (a + t * (3.0 * rise - 2.0 * a - b + t * (a + b - 2.0 * rise)));
}

double MonotoneCubic::slope(double at) const {
  if (at <= x_.front()) return slope_.front();
  if (at >= x_.back()) return slope_.back();
  const std::size_t i = piece(at);
  const double width = x_[i + 1] - x_[i];
  const double t = (at - x_[i]) / width;
  const double chord = (y_[i + 1] - y_[i]) / width;
  return slope_[i] + t * (2.0 * (3.0 * chord - 2.0 * slope_[i] - slope_[i + 1]) +
                          t * 3.0 * (slope_[i] + slope_[i + 1] - 2.0 * chord));
}

double MonotoneCubic::inverse(double wanted) const {
  const auto beyond = [&](double x, double y, double slope) { return slope > 0.0 ? x + (wanted - y) / slope : x; };
  if (wanted <= y_.front()) return beyond(x_.front(), y_.front(), slope_.front());
  if (wanted >= y_.back()) return beyond(x_.back(), y_.back(), slope_.back());
  const auto right = static_cast<std::size_t>(std::upper_bound(y_.begin(), y_.end(), wanted) - y_.begin());
  double lo = x_[right - 1];
  double hi = x_[right];
  double at = lo + (hi - lo) * (wanted - y_[right - 1]) / (y_[right] - y_[right - 1]);
  for (int step = 0; step < 60 && hi - lo > 0.0; ++step) {
    const double miss = value(at) - wanted;
    (miss > 0.0 ? hi : lo) = at;
    const double newton = at - miss / slope(at);
    const double next = newton > lo && newton < hi ? newton : 0.5 * (lo + hi);
    if (std::abs(next - at) <= 1e-15 * std::abs(at)) return next;
    at = next;
  }
  return at;
}

KaiserSinc::KaiserSinc(std::size_t zero_crossings, double stop_db) : zero_crossings_(zero_crossings) {
  const double beta = kaiser_beta(stop_db);
  const double scale = 1.0 / std::cyl_bessel_i(0.0, beta);
  const auto kernel = [&](std::size_t node) {
    const double u = static_cast<double>(node) / static_cast<double>(nodes_per_crossing);
    const double across = u / static_cast<double>(zero_crossings);
    if (across >= 1.0) return 0.0;
    const double window = scale * std::cyl_bessel_i(0.0, beta * std::sqrt(1.0 - across * across));
    const double phase = std::numbers::pi * u;
    return window * (node == 0 ? 1.0 : std::sin(phase) / phase);
  };
  const std::size_t nodes = zero_crossings * nodes_per_crossing;
  table_.reserve(nodes + 1);
  for (std::size_t i = 0; i <= nodes; ++i) {
    const double value = kernel(i);
    table_.push_back({value, kernel(i + 1) - value});
  }
}

double KaiserSinc::at(std::span<const double> x, double position, double bandwidth) const {
  if (x.empty()) return 0.0;
  const double last = static_cast<double>(x.size() - 1);
  const double from = std::max(0.0, std::ceil(position - reach(bandwidth)));
  const double to = std::min(last, std::floor(position + reach(bandwidth)));
  if (from > to) return 0.0;
  const double step = bandwidth * static_cast<double>(nodes_per_crossing);
  // Signed numbers: they turn into doubles and back in one instruction.
  const auto end = static_cast<std::int64_t>(to);
  const std::int64_t last_node = std::ssize(table_) - 1;
  double sum = 0.0;
  for (auto i = static_cast<std::int64_t>(from); i <= end; ++i) {
    const double node = std::abs(position - static_cast<double>(i)) * step;
    const std::int64_t whole = std::min(static_cast<std::int64_t>(node), last_node);
    const Node& at = table_[static_cast<std::size_t>(whole)];
    sum += x[static_cast<std::size_t>(i)] * (at.value + (node - static_cast<double>(whole)) * at.rise);
  }
  return bandwidth * sum;
}

}  // namespace stillmass::numeric
