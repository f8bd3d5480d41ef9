#include "stillmass/spectral/averages.hpp"

#include <algorithm>
#include <map>
#include <unordered_map>

namespace stillmass::spectral {

namespace {

/// Overlap correlations by lag, each computed once, on at most 2048 samples of the window (error below 1e-6).
class Correlation {
 public:
  Correlation(Window window, std::size_t length)
      : weights_(samples(window, std::min<std::size_t>(length, 2048))),
        step_(static_cast<double>(weights_.size()) / static_cast<double>(length)) {}

  double at(std::int64_t lag) {
    const double place = static_cast<double>(lag) * step_;
    const auto below = static_cast<std::size_t>(place);
    const double part = place - static_cast<double>(below);
    const double low = stored(below);
    return part == 0.0 ? low : low + part * (stored(below + 1) - low);
  }

 private:
  double stored(std::size_t lag) {
    const auto [place, is_new] = known_.try_emplace(lag, 0.0);
    if (is_new) place->second = overlap_correlation(weights_, lag);
    return place->second;
  }

  std::vector<double> weights_;
  double step_;
  std::unordered_map<std::size_t, double> known_;
};

/// How many pairs of blocks are that many frames apart, for all lags below `length`.
std::map<std::int64_t, std::int64_t> pairs_by_lag(std::int64_t length, std::span<const BlockRun> runs) {
  std::map<std::int64_t, std::int64_t> pairs;
  for (std::size_t a = 0; a < runs.size(); ++a) {
    const BlockRun& run = runs[a];
    for (std::int64_t m = 1; m < run.count && m * run.hop < length; ++m) pairs[m * run.hop] += run.count - m;
    for (std::size_t b = a + 1; b < runs.size() && runs[b].first - run.last() < length; ++b) {
      const BlockRun& later = runs[b];
      for (std::int64_t i = run.count - 1; i >= 0 && later.first - run.start(i) < length; --i) {
        for (std::int64_t j = 0; j < later.count && later.start(j) - run.start(i) < length; ++j) {
          ++pairs[later.start(j) - run.start(i)];
        }
      }
    }
  }
  return pairs;
}

}  // namespace

Averages averages(Window window, std::size_t length, std::span<const BlockRun> runs) {
  Averages result;
  for (const BlockRun& run : runs) result.blocks += run.count;
  if (result.blocks == 0) return result;
  Correlation correlation(window, length);
  double sum = static_cast<double>(result.blocks);
  for (const auto& [lag, count] : pairs_by_lag(static_cast<std::int64_t>(length), runs)) {
    const double r = correlation.at(lag);
    const auto pairs = static_cast<double>(count);
    sum += 2.0 * pairs * r * r;
    result.overlaps.push_back({static_cast<double>(lag) / static_cast<double>(length), pairs});
  }
  result.effective = static_cast<double>(result.blocks) * static_cast<double>(result.blocks) / sum;
  return result;
}

}  // namespace stillmass::spectral
