#include "stillmass/numeric/monte_carlo.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/numeric/distribution.hpp"
#include "stillmass/numeric/random.hpp"

namespace stillmass::numeric {
namespace {

constexpr std::size_t most_inputs = 64;

void check(const Input& input) {
  if (!std::isfinite(input.mean) || !std::isfinite(input.u) || input.u < 0.0) {
    throw base::usage_error(input.name, "needs a finite value and a standard uncertainty that is not negative");
  }
  if (input.distribution == Distribution::lognormal && !(input.mean > 0.0)) {
    throw base::usage_error(input.name, "must be positive");
  }
}

// Lower triangular L with L L^T = correlation; semidefinite matrices (inputs that move as one) are taken.
std::vector<double> cholesky_factor(const std::vector<double>& correlation, std::size_t n) {
  constexpr double rounding = 1e-6;  // of correlations that were written down and read back
  const auto refuse = [](const char* what) { return base::usage_error("correlation", what); };
  if (correlation.size() != n * n) throw refuse("has the wrong size");
  std::vector<double> factor(n * n, 0.0);
  for (std::size_t i = 0; i < n; ++i) {
    if (!(std::abs(correlation[i * n + i] - 1.0) <= rounding)) throw refuse("must have ones on its diagonal");
    for (std::size_t j = 0; j <= i; ++j) {
      if (!(std::abs(correlation[i * n + j] - correlation[j * n + i]) <= rounding)) throw refuse("must be symmetric");
      double rest = correlation[i * n + j];
      for (std::size_t k = 0; k < j; ++k) rest -= factor[i * n + k] * factor[j * n + k];
      const double pivot = factor[j * n + j];
      if (i == j) {
        if (rest < -rounding) throw refuse("is contradictory: not positive semidefinite");
        factor[i * n + i] = std::sqrt(std::max(rest, 0.0));
      } else if (pivot > std::sqrt(rounding)) {
        factor[i * n + j] = rest / pivot;
      } else if (std::abs(rest) > std::sqrt(rounding)) {
        throw refuse("is contradictory: not positive semidefinite");
      }
    }
  }
  return factor;
}

double from_normal(const Input& input, double z) {
  switch (input.distribution) {
    case Distribution::normal:
      return input.mean + input.u * z;
    case Distribution::lognormal: {
      const double variance = std::log1p(input.u * input.u / (input.mean * input.mean));
      return input.mean * std::exp(std::sqrt(variance) * z - 0.5 * variance);
    }
    case Distribution::rectangular:
      return input.mean + input.u * std::numbers::sqrt3 * (2.0 * normal_cdf(z) - 1.0);
  }
  return input.mean;
}

}  // namespace

Input input_of(std::string name, const base::Estimate& estimate, Distribution distribution, double u_where_unknown) {
  return {std::move(name), estimate.value, base::widened(estimate.u, estimate.dof).value_or(u_where_unknown),
          distribution};
}

Input rectangular_input(std::string name, base::Interval limits) {
  return {std::move(name), limits.middle(), 0.5 * limits.width() / std::numbers::sqrt3, Distribution::rectangular};
}

Cases::Cases(std::vector<Input> inputs, const std::vector<double>& correlation, std::uint64_t seed)
    : inputs_(std::move(inputs)), seed_(seed) {
  if (inputs_.size() > most_inputs) throw base::Error(base::ErrorKind::internal, "Cases", "too many inputs");
  for (const Input& input : inputs_) check(input);
  if (!correlation.empty()) factor_ = cholesky_factor(correlation, inputs_.size());
}

void Cases::draw(std::uint64_t n, std::span<double> values) const {
  const Random random(seed_);
  const std::size_t count = inputs_.size();
  double independent[most_inputs];
  for (std::size_t i = 0; i < count; ++i) independent[i] = random.normal(n, static_cast<std::uint32_t>(i));
  for (std::size_t i = 0; i < count; ++i) {
    double z = independent[i];
    if (!factor_.empty()) {
      z = 0.0;
      for (std::size_t k = 0; k <= i; ++k) z += factor_[i * count + k] * independent[k];
    }
    values[i] = from_normal(inputs_[i], z);
  }
}

std::vector<double> draw_all(const Cases& cases, std::size_t count, const base::Context& context) {
  const std::size_t inputs = cases.inputs().size();
  std::vector<double> all(count * inputs);
  base::for_ranges(
      context, count, 256,
      [&](std::size_t begin, std::size_t end) {
        for (std::size_t n = begin; n < end; ++n) {
          cases.draw(n, std::span<double>(all).subspan(n * inputs, inputs));
        }
        return true;
      },
      [](bool) {});
  return all;
}

Outcome::Outcome(std::vector<double> values) : sorted_(std::move(values)) {
  const auto finite = [](double x) { return std::isfinite(x); };
  if (sorted_.empty() || !std::all_of(sorted_.begin(), sorted_.end(), finite)) {
    throw base::Error(base::ErrorKind::internal, "Outcome", "needs finite values");
  }
  std::sort(sorted_.begin(), sorted_.end());
  const auto count = static_cast<double>(sorted_.size());
  mean_ = std::accumulate(sorted_.begin(), sorted_.end(), 0.0) / count;
  double squares = 0.0;
  for (const double x : sorted_) squares += (x - mean_) * (x - mean_);
  u_ = sorted_.size() > 1 ? std::sqrt(squares / (count - 1.0)) : 0.0;
}

double Outcome::quantile(double p) const {
  const double at = std::clamp(p, 0.0, 1.0) * static_cast<double>(sorted_.size() - 1);
  const auto below = static_cast<std::size_t>(at);
  if (below + 1 >= sorted_.size()) return sorted_.back();
  return sorted_[below] + (at - static_cast<double>(below)) * (sorted_[below + 1] - sorted_[below]);
}

base::Interval Outcome::symmetric_interval(double p) const {
  return {quantile(0.5 * (1.0 - p)), quantile(0.5 * (1.0 + p))};
}

base::Interval Outcome::shortest_interval(double p) const {
  const auto span = static_cast<std::size_t>(std::floor(p * static_cast<double>(sorted_.size() - 1)));
  std::size_t best = 0;
  for (std::size_t i = 0; i + span < sorted_.size(); ++i) {
    if (sorted_[i + span] - sorted_[i] < sorted_[best + span] - sorted_[best]) best = i;
  }
  return {sorted_[best], sorted_[best + span]};
}

double Outcome::fraction_up_to(double x) const {
  const auto end = std::upper_bound(sorted_.begin(), sorted_.end(), x);
  return static_cast<double>(end - sorted_.begin()) / static_cast<double>(sorted_.size());
}

base::Estimate Outcome::estimate(base::Quantity quantity) const { return {mean_, u_, {}, quantity}; }

std::vector<Driver> drivers(const Cases& cases, std::span<const double> draws, std::span<const double> outcome) {
  const std::size_t inputs = cases.inputs().size();
  const std::size_t count = outcome.size();
  if (draws.size() != count * inputs || count == 0) {
    throw base::Error(base::ErrorKind::internal, "drivers", "draws and outcome do not belong together");
  }
  const std::size_t classes = std::clamp<std::size_t>(count / 50, 2, 32);
  const double mean = std::accumulate(outcome.begin(), outcome.end(), 0.0) / static_cast<double>(count);
  double total = 0.0;
  for (const double y : outcome) total += (y - mean) * (y - mean);

  std::vector<Driver> shares;
  std::vector<std::size_t> order(count);
  for (std::size_t i = 0; i < inputs; ++i) {
    std::iota(order.begin(), order.end(), std::size_t{0});
    std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
      return std::pair(draws[a * inputs + i], a) < std::pair(draws[b * inputs + i], b);
    });
    double between = 0.0;
    for (std::size_t c = 0; c < classes; ++c) {
      const std::size_t begin = c * count / classes;
      const std::size_t end = (c + 1) * count / classes;
      double sum = 0.0;
      for (std::size_t n = begin; n < end; ++n) sum += outcome[order[n]] - mean;
      if (end > begin) between += sum * sum / static_cast<double>(end - begin);
    }
    // By chance alone the classes explain (classes - 1)/(count - 1) of the variance.
    const double chance = static_cast<double>(classes - 1) / std::max(1.0, static_cast<double>(count - 1));
    const double raw = total > 0.0 ? between / total : 0.0;
    const bool varies = cases.inputs()[i].u > 0.0;
    shares.push_back({cases.inputs()[i].name, varies ? std::clamp((raw - chance) / (1.0 - chance), 0.0, 1.0) : 0.0});
  }
  std::stable_sort(shares.begin(), shares.end(), [](const Driver& a, const Driver& b) { return a.share > b.share; });
  return shares;
}

}  // namespace stillmass::numeric
