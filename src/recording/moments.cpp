#include "recording/moments.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>

namespace stillmass::recording {
namespace {

constexpr std::size_t lanes = 8;  // independent sums, which the compiler turns into vector code

template <class Term>
double sum_of(std::span<const double> samples, Term term) {
  std::array<double, lanes> sums{};
  std::size_t i = 0;
  for (; i + lanes <= samples.size(); i += lanes) {
    for (std::size_t k = 0; k < lanes; ++k) sums[k] += term(samples[i + k]);
  }
  double sum = 0.0;
  for (; i < samples.size(); ++i) sum += term(samples[i]);
  for (const double part : sums) sum += part;
  return sum;
}

}  // namespace

void Moments::add(std::span<const double> samples) {
  if (samples.empty()) return;
  Moments fresh;
  fresh.count = static_cast<std::int64_t>(samples.size());
  fresh.mean = sum_of(samples, [](double x) { return x; }) / static_cast<double>(samples.size());
  const double mean_of_these = fresh.mean;
  fresh.squares = sum_of(samples, [&](double x) { return (x - mean_of_these) * (x - mean_of_these); });

  std::array<double, lanes> low;
  std::array<double, lanes> high;
  low.fill(samples[0]);
  high.fill(samples[0]);
  for (std::size_t i = 0; i < samples.size(); i += lanes) {
    const std::size_t used = std::min(lanes, samples.size() - i);
    for (std::size_t k = 0; k < used; ++k) {
      const double x = samples[i + k];
      low[k] = x < low[k] ? x : low[k];
      high[k] = x > high[k] ? x : high[k];
    }
  }
  fresh.least = *std::min_element(low.begin(), low.end());
  fresh.largest = *std::max_element(high.begin(), high.end());
  merge(fresh);
}

void Moments::merge(const Moments& other) {
  if (other.count == 0) return;
  const auto here = static_cast<double>(count);
  const auto there = static_cast<double>(other.count);
  const double shift = other.mean - mean;
  mean += shift * there / (here + there);
  squares += other.squares + shift * shift * here * there / (here + there);
  count += other.count;
  least = std::min(least, other.least);
  largest = std::max(largest, other.largest);
}

double Moments::rms() const { return count == 0 ? 0.0 : std::sqrt(squares / static_cast<double>(count)); }

double smallest_change(std::span<const double> samples) {
  constexpr double none = std::numeric_limits<double>::infinity();
  std::array<double, lanes> least;
  least.fill(none);
  for (std::size_t i = 1; i < samples.size(); i += lanes) {
    const std::size_t used = std::min(lanes, samples.size() - i);
    for (std::size_t k = 0; k < used; ++k) {
      const double change = std::abs(samples[i + k] - samples[i + k - 1]);
      const double counted = change > 0.0 ? change : none;
      least[k] = counted < least[k] ? counted : least[k];
    }
  }
  return *std::min_element(least.begin(), least.end());
}

}  // namespace stillmass::recording
