#include "stillmass/numeric/statistics.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>
#include <cstring>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "numeric/statistics", what);
}

// Two values that are calculated with at once (SSE2, and whatever the machine has elsewhere): compilers do not find
// this by themselves in sums, whose order they must keep.
using Pair [[gnu::vector_size(2 * sizeof(double))]] = double;
constexpr std::size_t width = 2;

Pair pair_at(const double* x) {
  Pair both;
  std::memcpy(&both, x, sizeof both);
  return both;
}

// Sums of the powers of the distance from the first value.
struct Powers {
  double first = 0.0;
  double second = 0.0;
  double third = 0.0;
  double fourth = 0.0;

  void add(double distance) {
    const double square = distance * distance;
    first += distance;
    second += square;
    third += square * distance;
    fourth += square * square;
  }
};

Powers powers(std::span<const double> x) {
  const Pair shift{x[0], x[0]};
  std::array<Pair, 2> first{}, second{}, third{}, fourth{};
  std::size_t i = 0;
  for (; i + 2 * width <= x.size(); i += 2 * width) {
    for (std::size_t k = 0; k < 2; ++k) {
      const Pair distance = pair_at(x.data() + i + k * width) - shift;
      const Pair square = distance * distance;
      first[k] += distance;
      second[k] += square;
      third[k] += square * distance;
      fourth[k] += square * square;
    }
  }
  Powers sums;
  for (; i < x.size(); ++i) sums.add(x[i] - x[0]);
  const auto total = [](const std::array<Pair, 2>& part) { return part[0][0] + part[0][1] + part[1][0] + part[1][1]; };
  sums.first += total(first);
  sums.second += total(second);
  sums.third += total(third);
  sums.fourth += total(fourth);
  return sums;
}

}  // namespace

double quantile(std::vector<double> values, double probability) {
  require(!values.empty(), "an empty set has no quantile");
  require(probability >= 0.0 && probability <= 1.0, "a probability must lie between 0 and 1");
  const double place = probability * static_cast<double>(values.size() - 1);
  const auto below = static_cast<std::size_t>(place);
  const auto nth = values.begin() + static_cast<std::ptrdiff_t>(below);
  std::nth_element(values.begin(), nth, values.end());
  const double low = *nth;
  if (below + 1 == values.size()) return low;
  const double high = *std::min_element(nth + 1, values.end());
  return low + (place - static_cast<double>(below)) * (high - low);
}

double median(std::vector<double> values) { return quantile(std::move(values), 0.5); }

double mad_scale(std::vector<double> values) {
  const double middle = median(values);
  for (double& x : values) x = std::abs(x - middle);
  return 1.4826 * median(std::move(values));
}

base::Interval extremes(std::span<const double> values) {
  require(!values.empty(), "an empty set has no extremes");
  constexpr std::size_t pairs = 4;
  std::array<Pair, pairs> least, greatest;
  least.fill(Pair{values[0], values[0]});
  greatest = least;
  std::size_t i = 0;
  for (; i + pairs * width <= values.size(); i += pairs * width) {
    for (std::size_t k = 0; k < pairs; ++k) {
      const Pair x = pair_at(values.data() + i + k * width);
      least[k] = x < least[k] ? x : least[k];
      greatest[k] = x > greatest[k] ? x : greatest[k];
    }
  }
  base::Interval both{values[0], values[0]};
  const auto widen = [&](double low, double high) {
    both.lo = std::min(both.lo, low);
    both.hi = std::max(both.hi, high);
  };
  for (; i < values.size(); ++i) widen(values[i], values[i]);
  for (std::size_t k = 0; k < pairs; ++k) {
    for (std::size_t j = 0; j < width; ++j) widen(least[k][j], greatest[k][j]);
  }
  return both;
}

void RunningMoments::add(double x) {
  const double before = static_cast<double>(count_);
  const double n = static_cast<double>(++count_);
  const double delta = x - mean_;
  const double step = delta / n;
  const double square = step * step;
  const double term = delta * step * before;
  mean_ += step;
  m4_ += term * square * (n * n - 3.0 * n + 3.0) + 6.0 * square * m2_ - 4.0 * step * m3_;
  m3_ += term * step * (n - 2.0) - 3.0 * step * m2_;
  m2_ += term;
}

void RunningMoments::add(std::span<const double> values) {
  // Powers of the distance from the first of so many values at a time, in one go: no division a value. The distance is
  // that of values among themselves, so an offset costs no digits, and equal values have exactly their mean.
  constexpr std::size_t at_once = 1024;
  for (std::size_t from = 0; from < values.size(); from += at_once) {
    const auto part = values.subspan(from, std::min(at_once, values.size() - from));
    const Powers sums = powers(part);
    const auto n = static_cast<double>(part.size());
    const double shift = sums.first / n;
    const double square = shift * shift;
    RunningMoments fresh;
    fresh.count_ = part.size();
    fresh.mean_ = part[0] + shift;
    fresh.m2_ = std::max(sums.second - n * square, 0.0);
    fresh.m3_ = sums.third - 3.0 * shift * sums.second + 2.0 * n * square * shift;
    fresh.m4_ =
        std::max(sums.fourth - 4.0 * shift * sums.third + 6.0 * square * sums.second - 3.0 * n * square * square, 0.0);
    merge(fresh);
  }
}

void RunningMoments::merge(const RunningMoments& other) {
  if (other.count_ == 0) return;
  if (count_ == 0) {
    *this = other;
    return;
  }
  const double a = static_cast<double>(count_);
  const double b = static_cast<double>(other.count_);
  const double n = a + b;
  const double d = other.mean_ - mean_;
  const double d2 = d * d;
  m4_ += other.m4_ + d2 * d2 * a * b * (a * a - a * b + b * b) / (n * n * n) +
         6.0 * d2 * (a * a * other.m2_ + b * b * m2_) / (n * n) + 4.0 * d * (a * other.m3_ - b * m3_) / n;
  m3_ += other.m3_ + d * d2 * a * b * (a - b) / (n * n) + 3.0 * d * (a * other.m2_ - b * m2_) / n;
  m2_ += other.m2_ + d2 * a * b / n;
  mean_ += d * b / n;
  count_ += other.count_;
}

std::optional<double> RunningMoments::variance() const {
  if (count_ < 2) return std::nullopt;
  return m2_ / static_cast<double>(count_ - 1);
}

std::optional<double> RunningMoments::standard_deviation() const {
  const auto square = variance();
  return square ? std::optional(std::sqrt(*square)) : std::nullopt;
}

std::optional<double> RunningMoments::rms() const {
  if (count_ == 0) return std::nullopt;
  return std::sqrt(mean_ * mean_ + m2_ / static_cast<double>(count_));
}

std::optional<double> RunningMoments::kurtosis() const {
  if (!(m2_ > 0.0)) return std::nullopt;
  return static_cast<double>(count_) * m4_ / (m2_ * m2_);
}

void RunningCorrelation::add(double x, double y) {
  const double n = static_cast<double>(++count_);
  const double dx = x - mean_x_;
  const double dy = y - mean_y_;
  mean_x_ += dx / n;
  mean_y_ += dy / n;
  xx_ += dx * (x - mean_x_);
  yy_ += dy * (y - mean_y_);
  xy_ += dx * (y - mean_y_);
}

void RunningCorrelation::add(std::span<const double> x, std::span<const double> y) {
  require(x.size() == y.size(), "the two signals differ in length");
  for (std::size_t i = 0; i < x.size(); ++i) add(x[i], y[i]);
}

void RunningCorrelation::merge(const RunningCorrelation& other) {
  if (other.count_ == 0) return;
  const double a = static_cast<double>(count_);
  const double b = static_cast<double>(other.count_);
  const double dx = other.mean_x_ - mean_x_;
  const double dy = other.mean_y_ - mean_y_;
  const double share = a * b / (a + b);
  xx_ += other.xx_ + dx * dx * share;
  yy_ += other.yy_ + dy * dy * share;
  xy_ += other.xy_ + dx * dy * share;
  mean_x_ += dx * b / (a + b);
  mean_y_ += dy * b / (a + b);
  count_ += other.count_;
}

std::optional<double> RunningCorrelation::correlation() const {
  if (!(xx_ > 0.0) || !(yy_ > 0.0)) return std::nullopt;
  return std::clamp(xy_ / std::sqrt(xx_ * yy_), -1.0, 1.0);
}

std::optional<double> kurtosis(std::span<const double> values) {
  RunningMoments moments;
  moments.add(values);
  return moments.kurtosis();
}

std::optional<double> correlation(std::span<const double> x, std::span<const double> y) {
  RunningCorrelation sums;
  sums.add(x, y);
  return sums.correlation();
}

}  // namespace stillmass::numeric
