#include "stillmass/spectral/averages.hpp"

#include <algorithm>
#include <cmath>
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

/// Weights of blocks that fall by `decay` from each to the one before it; that of the last is 1.
class Decay {
 public:
  explicit Decay(double decay) : decay_(decay) {}

  /// The weight of a block that so many others follow.
  double of(std::int64_t later) const { return decay_ == 1.0 ? 1.0 : std::pow(decay_, static_cast<double>(later)); }
  /// Sum of weight^p over `count` blocks in a row that so many others follow.
  double sum(std::int64_t count, std::int64_t later, int p = 1) const {
    if (decay_ == 1.0) return static_cast<double>(count);
    const double step = std::pow(decay_, p);
    return std::pow(of(later), p) * (1.0 - std::pow(step, static_cast<double>(count))) / (1.0 - step);
  }
  /// Sum of the products of the weights of blocks m apart, over a run of `count` that so many others follow.
  double products(std::int64_t count, std::int64_t m, std::int64_t later) const {
    return of(m) * sum(count - m, later, 2);
  }

 private:
  double decay_;
};

/// Sum of w_i w_j over the pairs of blocks that are that many frames apart, for all lags below `length`.
std::map<std::int64_t, double> pairs_by_lag(std::int64_t length, std::span<const BlockRun> runs, std::int64_t blocks,
                                            const Decay& decay) {
  std::map<std::int64_t, double> pairs;
  std::int64_t after_run = blocks;  // blocks that follow the run
  for (std::size_t a = 0; a < runs.size(); ++a) {
    const BlockRun& run = runs[a];
    after_run -= run.count;
    for (std::int64_t m = 1; m < run.count && m * run.hop < length; ++m) {
      pairs[m * run.hop] += decay.products(run.count, m, after_run);
    }
    std::int64_t after_later = after_run;
    for (std::size_t b = a + 1; b < runs.size() && runs[b].first - run.last() < length; ++b) {
      const BlockRun& later = runs[b];
      after_later -= later.count;
      for (std::int64_t i = run.count - 1; i >= 0 && later.first - run.start(i) < length; --i) {
        for (std::int64_t j = 0; j < later.count && later.start(j) - run.start(i) < length; ++j) {
          pairs[later.start(j) - run.start(i)] +=
              decay.of(after_run + run.count - 1 - i) * decay.of(after_later + later.count - 1 - j);
        }
      }
    }
  }
  return pairs;
}

}  // namespace

Averages averages(Window window, std::size_t length, std::span<const BlockRun> runs, double decay) {
  Averages result;
  for (const BlockRun& run : runs) result.blocks += run.count;
  if (result.blocks == 0) return result;
  const auto blocks = static_cast<double>(result.blocks);
  const Decay weights(decay);
  const double all = weights.sum(result.blocks, 0);
  const double scale = blocks / all * blocks / all;  // to weights of sum 1, times K^2
  const double squares = scale * weights.sum(result.blocks, 0, 2);
  if (decay != 1.0) result.overlaps.push_back({0.0, 0.5 * (squares - blocks)});
  Correlation correlation(window, length);
  double sum = squares;
  for (const auto& [lag, products] : pairs_by_lag(static_cast<std::int64_t>(length), runs, result.blocks, weights)) {
    const double r = correlation.at(lag);
    const double pairs = scale * products;
    sum += 2.0 * pairs * r * r;
    result.overlaps.push_back({static_cast<double>(lag) / static_cast<double>(length), pairs});
  }
  result.effective = blocks * blocks / sum;
  return result;
}

}  // namespace stillmass::spectral
