#include "recording/level_counts.hpp"

#include <algorithm>
#include <cmath>

#include "stillmass/recording/sample_quality.hpp"

namespace stillmass::recording {
namespace {

// Least n with 2^n above the value.
int exponent_of(double value) {
  int exponent = -1000;
  if (value > 0.0) std::frexp(value, &exponent);
  return exponent;
}

}  // namespace

void LevelCounts::Edges::add(const Edges& more) {
  if (more.count == 0) return;
  first = count == 0 ? more.first : std::min(first, more.first);
  last = std::max(last, more.last);
  count += more.count;
}

int LevelCounts::bin_of(double sample) const {
  const auto bin = static_cast<int>(std::floor(std::ldexp(sample - zero_, 10 - exponent_))) + side;
  return std::clamp(bin, 0, bins - 1);
}

double LevelCounts::bin_width() const { return std::ldexp(1.0, exponent_ - 10); }

void LevelCounts::widen(int exponent) {
  if (exponent <= exponent_) return;
  if (exponent_ != empty_exponent) {
    const int shift = std::min(exponent - exponent_, 20);
    std::array<std::int64_t, bins> counts{};
    std::array<Edges, bins> edges{};
    for (int bin = 0; bin < bins; ++bin) {
      const auto from = static_cast<std::size_t>(bin);
      const auto to = static_cast<std::size_t>(((bin - side) >> shift) + side);
      counts[to] += counts_[from];
      edges[to].add(edges_[from]);
    }
    counts_ = counts;
    edges_ = edges;
  }
  exponent_ = exponent;
}

void LevelCounts::take(std::span<const double> samples, double reach) {
  widen(exponent_of(reach));
  const double scale = std::ldexp(1.0, 10 - exponent_);
  for (const double sample : samples) {
    // Adding `side` before the cut towards zero makes it a floor.
    const auto bin = static_cast<int>((sample - zero_) * scale + side);
    ++counts_[static_cast<std::size_t>(std::clamp(bin, 0, bins - 1))];
  }
}

void LevelCounts::take_edge(double sample, std::int64_t frame) {
  widen(exponent_of(std::abs(sample - zero_)));
  edges_[static_cast<std::size_t>(bin_of(sample))].add({1, frame, frame});
}

void LevelCounts::merge(const LevelCounts& later) {
  if (later.exponent_ == empty_exponent) return;
  LevelCounts other = later;
  other.widen(exponent_);
  widen(other.exponent_);
  for (std::size_t bin = 0; bin < bins; ++bin) {
    counts_[bin] += other.counts_[bin];
    edges_[bin].add(other.edges_[bin]);
  }
}

LevelCounts::Span LevelCounts::occupied() const {
  const auto is_used = [](std::int64_t count) { return count > 0; };
  const auto lowest = static_cast<int>(std::find_if(counts_.begin(), counts_.end(), is_used) - counts_.begin());
  const auto highest = static_cast<int>(counts_.rend() - std::find_if(counts_.rbegin(), counts_.rend(), is_used)) - 1;
  return {lowest, highest};
}

std::int64_t LevelCounts::sum(int from, int to) const {
  std::int64_t sum = 0;
  for (int bin = std::max(from, 0); bin < std::min(to, bins); ++bin) sum += counts_[static_cast<std::size_t>(bin)];
  return sum;
}

std::optional<LevelCounts::FlatTop> LevelCounts::flat_top(int sign, double step) const {
  const auto [lowest, highest] = occupied();
  const int half_span = (highest - lowest) / 2;
  if (half_span < quality_limit::flat_top_span_bins) return std::nullopt;
  const std::int64_t all = sum(0, bins);
  for (const double share : quality_limit::flat_top_heights) {
    const int height =
        std::max({2, static_cast<int>(std::ceil(share * half_span)), static_cast<int>(std::ceil(step / bin_width()))});
    const int from = sign > 0 ? highest + 1 - height : lowest;
    const std::int64_t in = sum(from, from + height);
    const std::int64_t next = sign > 0 ? sum(from - 3 * height, from) : sum(from + height, from + 4 * height);
    // The level at which the signal rests is no flat top.
    const std::int64_t beyond = sign > 0 ? sum(from - 3 * height, bins) : sum(0, from + 4 * height);
    if (2 * beyond > all || static_cast<double>(in) < quality_limit::flat_top_ratio * static_cast<double>(next))
      continue;
    FlatTop top;
    Edges edges;
    for (int bin = from; bin < from + height; ++bin) edges.add(edges_[static_cast<std::size_t>(bin)]);
    if (edges.count < quality_limit::flat_top_edges) continue;
    top.frames = {edges.first, edges.last + 1};
    top.level = zero_ + bin_width() * (sign > 0 ? highest + 1 - side : lowest - side);
    top.samples = in;
    return top;
  }
  return std::nullopt;
}

bool LevelCounts::has_two_levels() const {
  const auto [lowest, highest] = occupied();
  if (highest - lowest < quality_limit::flat_top_span_bins) return false;
  const int edge = static_cast<int>(quality_limit::pulse_edge * (highest - lowest + 1));
  const std::int64_t low = sum(lowest, lowest + edge);
  const std::int64_t high = sum(highest + 1 - edge, highest + 1);
  const auto all = static_cast<double>(sum(0, bins));
  return static_cast<double>(low + high) > quality_limit::pulse_share * all &&
         static_cast<double>(std::min(low, high)) > quality_limit::pulse_least * all;
}

}  // namespace stillmass::recording
