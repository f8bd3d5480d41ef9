#include "recording/spikes.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>

#include "stillmass/recording/sample_quality.hpp"

#include "recording/strip.hpp"

namespace stillmass::recording {
namespace {

constexpr std::size_t middle = spike_window / 2;

bool larger(const Spike& a, const Spike& b) {
  return a.distance != b.distance ? a.distance > b.distance : a.frame < b.frame;
}

// The sample at `place` against the others of its window.
void judge(std::span<const double> window, std::size_t place, std::int64_t first_frame, SpikeList& spikes) {
  double low = window[place == 0 ? 1 : 0];
  double high = low;
  for (std::size_t i = 0; i < window.size(); ++i) {
    if (i == place) continue;
    low = std::min(low, window[i]);
    high = std::max(high, window[i]);
  }
  const double distance = std::abs(window[place] - 0.5 * (low + high));
  if (distance > quality_limit::spike_range * (high - low) && distance > 0.0) {
    spikes.add({first_frame + static_cast<std::int64_t>(place), distance});
  }
}

// A cheap necessary condition for a spike at x[0]; true for one sample in a thousand of noise.
bool may_be_spike(const double* x) {
  const double rise = std::abs(x[0] - 0.5 * (x[-1] + x[1]));
  const double across = std::abs(x[1] - x[-1]);
  const double before = std::abs(x[-1] - x[-2]);
  const double behind = std::abs(x[2] - x[1]);
  const double beside = before > behind ? before : behind;
  return rise > (quality_limit::spike_range - 1.0) * (across > beside ? across : beside);
}

}  // namespace

void SpikeList::add(const Spike& spike) {
  if (largest.size() == kept && !larger(spike, largest.back())) return;
  largest.insert(std::upper_bound(largest.begin(), largest.end(), spike, larger), spike);
  if (largest.size() > kept) largest.pop_back();
}

void SpikeList::append(const SpikeList& later) {
  for (const Spike& spike : later.largest) add(spike);
}

void find_spikes(std::span<const double> samples, std::size_t windows, std::int64_t first_frame, bool at_begin,
                 bool at_end, SpikeList& spikes) {
  if (samples.size() < spike_window) return;
  const std::size_t count = std::min(windows, samples.size() - spike_window + 1);
  const auto window = [&](std::size_t start) { return samples.subspan(start, spike_window); };
  const auto frame = [&](std::size_t start) { return first_frame + static_cast<std::int64_t>(start); };

  if (at_begin && count > 0) judge(window(0), 0, frame(0), spikes);
  for (std::size_t begin = 0; begin < count; begin += strip) {
    const std::size_t end = std::min(count, begin + strip);
    const double* const first = samples.data() + begin + middle;
    if (end == begin + strip && !any_in_strip(first, [](const double* at) { return may_be_spike(at); })) continue;
    for (std::size_t i = begin; i < end; ++i) {
      if (may_be_spike(samples.data() + i + middle)) judge(window(i), middle, frame(i), spikes);
    }
  }
  const std::size_t last = samples.size() - spike_window;
  if (at_end && count == last + 1) judge(window(last), spike_window - 1, frame(last), spikes);
}

}  // namespace stillmass::recording
