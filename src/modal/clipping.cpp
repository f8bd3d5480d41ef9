#include "modal/clipping.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

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

/// True where the signal stays at `level` for a run and leaves it sharply on both sides.
bool flat_at(std::span<const double> samples, double level, double step) {
  for (std::size_t i = 0; i < samples.size();) {
    if (samples[i] != level) {
      ++i;
      continue;
    }
    const std::size_t begin = i;
    while (i < samples.size() && samples[i] == level) ++i;
    if (i - begin < flat_run || begin == 0 || i == samples.size()) continue;
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
  for (const double level : {low, high}) {
    if (flat_at(samples, level, step)) return std::abs(level - channel.offset);
  }
  return std::nullopt;
}

}  // namespace stillmass::modal
