#include "modal/clipping.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "stillmass/numeric/statistics.hpp"

namespace stillmass::modal {
namespace {

constexpr double near_full_scale = 0.998;
constexpr std::size_t flat_run = 3;
constexpr double sharp_steps = 4.0;

double least_step(std::span<const double> samples) {
  double least = std::numeric_limits<double>::infinity();
  for (std::size_t i = 1; i < samples.size(); ++i) {
    const double step = std::abs(samples[i] - samples[i - 1]);
    if (step > 0.0) least = std::min(least, step);
  }
  return least;
}

/// How long the signal usually keeps a value: 1, or more where a recorder repeats the samples of a slower sensor.
std::size_t usual_run(std::span<const double> samples) {
  std::vector<double> runs{1.0};
  for (std::size_t i = 1; i < samples.size(); ++i) {
    if (samples[i] == samples[i - 1])
      runs.back() += 1.0;
    else
      runs.push_back(1.0);
  }
  return static_cast<std::size_t>(numeric::quantile(std::move(runs), 0.9));
}

/// True where the signal stays at `level` for a run and leaves it sharply on both sides.
bool flat_at(std::span<const double> samples, double level, std::size_t least_run, double step) {
  for (std::size_t i = 0; i < samples.size();) {
    if (samples[i] != level) {
      ++i;
      continue;
    }
    const std::size_t begin = i;
    while (i < samples.size() && samples[i] == level) ++i;
    if (i - begin < least_run || begin == 0 || i == samples.size()) continue;
    const double departure = std::min(std::abs(samples[begin - 1] - level), std::abs(samples[i] - level));
    if (departure > sharp_steps * step) return true;
  }
  return false;
}

}  // namespace

std::optional<double> clipped_level(std::span<const double> samples, const recording::Channel& channel) {
  if (samples.empty()) return std::nullopt;
  const auto [low, high] = std::ranges::minmax(samples);
  const double reach = std::max(std::abs(low - channel.offset), std::abs(high - channel.offset));
  if (channel.full_scale && reach >= near_full_scale * std::abs(*channel.full_scale)) return reach;
  const double step = channel.stored_step ? std::abs(*channel.stored_step) : least_step(samples);
  const std::size_t least_run = std::max(flat_run, usual_run(samples) + 2);
  for (const double level : {low, high}) {
    if (flat_at(samples, level, least_run, step)) return std::abs(level - channel.offset);
  }
  return std::nullopt;
}

}  // namespace stillmass::modal
