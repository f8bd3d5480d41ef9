#include "stillmass/recording/overview.hpp"

#include <algorithm>
#include <limits>

namespace stillmass::recording {
namespace {

constexpr base::Interval nothing{std::numeric_limits<double>::infinity(), -std::numeric_limits<double>::infinity()};

void widen(base::Interval& column, const base::Interval& by) {
  column.lo = std::min(column.lo, by.lo);
  column.hi = std::max(column.hi, by.hi);
}

}  // namespace

Overview::Overview(const Recording& recording, FrameRange range, std::size_t columns)
    : recording_(&recording),
      range_(range),
      owned_(range),
      columns_(std::min(std::max<std::size_t>(columns, 1), static_cast<std::size_t>(range.size()))) {
  held_.assign(recording.channels.size(), std::vector<base::Interval>(columns_, nothing));
}

Overview::Overview(const Overview& whole, FrameRange owned)
    : recording_(whole.recording_), range_(whole.range_), columns_(whole.columns_) {
  owned_ = {std::max(owned.begin, range_.begin), std::min(owned.end, range_.end)};
  std::size_t count = 0;
  if (owned_.size() > 0) {
    first_column_ = column_of(owned_.begin);
    count = column_of(owned_.end - 1) - first_column_ + 1;
  }
  held_.assign(whole.held_.size(), std::vector<base::Interval>(count, nothing));
}

std::size_t Overview::column_of(std::int64_t frame) const {
  return static_cast<std::size_t>((frame - range_.begin) * static_cast<std::int64_t>(columns_) / range_.size());
}

std::int64_t Overview::first_frame_of(std::size_t column) const {
  const auto n = static_cast<std::int64_t>(columns_);
  return range_.begin + (static_cast<std::int64_t>(column) * range_.size() + n - 1) / n;
}

std::unique_ptr<Consumer> Overview::fresh(FrameRange owned) const {
  return std::unique_ptr<Consumer>(new Overview(*this, owned));
}

void Overview::take(const Chunk& chunk) {
  const FrameRange wanted{std::max(chunk.range().begin, owned_.begin), std::min(chunk.range().end, owned_.end)};
  for (std::size_t c = 0; c < held_.size(); ++c) {
    const auto samples = chunk.channel(c);
    const std::vector<FrameRange> whole{wanted};
    for (const FrameRange& valid : chunk.all_valid() ? whole : chunk.valid[c]) {
      std::int64_t at = std::max(valid.begin, wanted.begin);
      const std::int64_t stop = std::min(valid.end, wanted.end);
      while (at < stop) {
        const std::size_t column = column_of(at);
        const std::int64_t end = std::min(stop, first_frame_of(column + 1));
        base::Interval found = nothing;
        for (; at < end; ++at) {
          const double sample = samples[static_cast<std::size_t>(at - chunk.first_frame)];
          widen(found, {sample, sample});
        }
        widen(held_[c][column - first_column_], found);
      }
    }
  }
}

void Overview::merge(Consumer& next) {
  const auto& other = dynamic_cast<Overview&>(next);
  for (std::size_t c = 0; c < held_.size(); ++c) {
    for (std::size_t k = 0; k < other.held_[c].size(); ++k) {
      widen(held_[c][other.first_column_ - first_column_ + k], other.held_[c][k]);
    }
  }
}

OverviewPicture Overview::result() const {
  OverviewPicture picture;
  for (std::size_t k = 0; k < columns_; ++k) picture.time_s.push_back(recording_->time_s(first_frame_of(k)));
  for (const auto& columns : held_) {
    auto& out = picture.channels.emplace_back();
    for (const base::Interval& column : columns) {
      out.push_back(column.lo <= column.hi ? std::optional(column) : std::nullopt);
    }
  }
  return picture;
}

}  // namespace stillmass::recording
