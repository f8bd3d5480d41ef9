#include "recording/slow_mean.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>

#include "stillmass/numeric/statistics.hpp"
#include "stillmass/recording/sample_quality.hpp"

namespace stillmass::recording {
namespace {

constexpr std::int64_t most_columns = 240;

std::int64_t columns_of(FrameRange range, double rate_hz) {
  const double seconds = static_cast<double>(range.size()) / rate_hz / quality_limit::drift_seconds;
  return std::clamp(static_cast<std::int64_t>(std::min(seconds, 1e6)), std::int64_t{1}, most_columns);
}

}  // namespace

SlowMean::SlowMean(FrameRange range, double rate_hz)
    : range_(range), columns_(columns_of(range, rate_hz)), held_(static_cast<std::size_t>(columns_)) {}

void SlowMean::take(std::span<const double> samples, std::int64_t first_frame) {
  const std::int64_t size = std::max<std::int64_t>(range_.size(), 1);
  while (!samples.empty()) {
    const std::int64_t at = first_frame - range_.begin;
    if (at < 0 || at >= size) return;
    const std::int64_t column = std::min(columns_ - 1, at * columns_ / size);
    const std::int64_t end = ((column + 1) * size + columns_ - 1) / columns_;  // first frame of the next column
    const auto count = std::min<std::int64_t>(end - at, std::ssize(samples));
    held_[static_cast<std::size_t>(column)].add(samples.first(static_cast<std::size_t>(count)));
    samples = samples.subspan(static_cast<std::size_t>(count));
    first_frame += count;
  }
}

void SlowMean::merge(const SlowMean& later) {
  for (std::size_t i = 0; i < held_.size(); ++i) held_[i].merge(later.held_[i]);
}

std::vector<SlowMean::Column> SlowMean::usable() const {
  std::vector<Column> all;
  for (std::int64_t i = 0; i < columns_; ++i) {
    const Moments& moments = held_[static_cast<std::size_t>(i)];
    const FrameRange frames{range_.begin + (i * range_.size() + columns_ - 1) / columns_,
                            range_.begin + ((i + 1) * range_.size() + columns_ - 1) / columns_};
    if (2 * moments.count >= frames.size()) all.push_back({frames, moments});
  }
  return all;
}

std::optional<SlowMean::Shift> SlowMean::shift() const {
  const std::vector<Column> columns = usable();
  if (columns.size() < quality_limit::drift_columns) return std::nullopt;
  std::vector<double> mean;
  std::vector<double> swing;
  for (const Column& column : columns) {
    mean.push_back(column.moments.mean);
    swing.push_back(column.moments.rms());
  }
  const double usual = numeric::median(swing);
  const std::size_t n = mean.size();

  // What the mean does from column to column without going anywhere.
  std::vector<double> steps;
  for (std::size_t i = 1; i < n; ++i) steps.push_back(mean[i] - mean[i - 1]);
  const double scatter = numeric::mad_scale(steps) / std::sqrt(2.0);
  const double noticed = std::max(quality_limit::drift_scatter * scatter, quality_limit::drift_share * usual);
  // A blow at the beginning has a mean of its own, which its swing exceeds by far.
  const double noticed_at_first = std::max(noticed, quality_limit::drift_share * swing[0]);

  const double last = numeric::median({mean.begin() + static_cast<std::ptrdiff_t>(n / 2), mean.end()});
  const double at_first = mean[0] - last;
  const auto far = [&](std::size_t i) {
    return std::abs(mean[i] - last) > std::max(0.1 * std::abs(at_first), 4.0 * scatter);
  };
  const auto largest =
      std::max_element(steps.begin(), steps.end(), [](double a, double b) { return std::abs(a) < std::abs(b); });
  const auto jump = static_cast<std::size_t>(largest - steps.begin());
  // A column that holds the jump has a mean between those of its neighbours: two steps make it.
  double jumped = *largest;
  for (const std::size_t beside : {jump - 1, jump + 1}) {
    if (beside < steps.size() && steps[beside] * *largest > 0.0 && std::abs(steps[beside]) > 4.0 * scatter) {
      jumped += steps[beside];
      break;
    }
  }
  const bool is_jump = std::abs(jumped) > 0.8 * std::abs(at_first);
  if (jump > 0 && is_jump && std::abs(at_first) > noticed_at_first) {
    return Shift{Shift::Kind::jumps, jumped, {columns[jump].frames.begin, columns[jump + 1].frames.end}};
  }
  if (std::abs(at_first) > noticed_at_first) {
    std::size_t settled = 0;
    while (settled < n && far(settled)) ++settled;
    std::size_t away = 0;
    for (std::size_t i = settled; i < n; ++i) away += far(i) ? 1 : 0;
    if (settled <= n / 2 && 10 * away <= n) {
      return Shift{Shift::Kind::settles, -at_first, {columns[0].frames.begin, columns[settled].frames.begin}};
    }
  }

  const std::size_t quarter = n / 4;
  const double begin = numeric::median({mean.begin(), mean.begin() + static_cast<std::ptrdiff_t>(quarter)});
  const double end = numeric::median({mean.end() - static_cast<std::ptrdiff_t>(quarter), mean.end()});
  if (!(std::abs(end - begin) > noticed)) return std::nullopt;
  if (std::abs(jumped) > 0.6 * std::abs(end - begin)) {
    return Shift{Shift::Kind::jumps, end - begin, {columns[jump].frames.begin, columns[jump + 1].frames.end}};
  }
  return Shift{Shift::Kind::drifts, end - begin, {columns.front().frames.begin, columns.back().frames.end}};
}

}  // namespace stillmass::recording
