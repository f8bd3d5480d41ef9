#include "recording/even_rows.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

namespace stillmass::recording {
namespace {

constexpr std::size_t nodes = 6;
constexpr std::size_t block_rows = 1024;
constexpr std::int64_t run_in_rows = 64;
constexpr double accepted_error = 0.01;
constexpr double remainder = (15.0 / 8.0) * (15.0 / 8.0) / 720.0;

}  // namespace

double even_limit_hz(double widest_step_s) {
  return std::pow(accepted_error / remainder, 1.0 / 6.0) / (2.0 * std::numbers::pi * widest_step_s);
}

EvenRows::EvenRows(std::shared_ptr<const CsvSource> source)
    : source_(std::move(source)), channels_(source_->table.channels.size()), rows_(source_) {}

void EvenRows::enter(const TimedRows& part) {
  if (part.first_row == part_.first_row && part.rows == part_.rows) return;
  part_ = part;
  forget();
}

// Begins reading some rows before the last mark that lies before the instant, so that the stamps to be passed over are
// the same as on the way through all rows.
void EvenRows::restart(double time_s) {
  std::int64_t row = part_.first_row;
  for (const RowTime& mark : source_->scan.mark_times) {
    const bool in_part = mark.row >= part_.first_row && mark.row < part_.first_row + part_.rows;
    if (in_part && mark.time_s < time_s) row = std::max(part_.first_row, mark.row - run_in_rows);
  }
  forget();
  rows_.seek(row);
}

void EvenRows::forget() {
  times_.clear();
  values_.clear();
  bad_.clear();
  cursor_ = 0;
}

// Appends a block of rows of the part; drops what lies well before the cursor. False at the end of the part.
bool EvenRows::read_more() {
  const std::int64_t left = part_.first_row + part_.rows - rows_.at();
  if (left <= 0) return false;
  if (cursor_ > block_rows) {
    const std::size_t drop = cursor_ - nodes;
    times_.erase(times_.begin(), times_.begin() + static_cast<std::ptrdiff_t>(drop));
    values_.erase(values_.begin(), values_.begin() + static_cast<std::ptrdiff_t>(drop * channels_));
    bad_.erase(bad_.begin(), bad_.begin() + static_cast<std::ptrdiff_t>(drop * channels_));
    cursor_ -= drop;
  }
  const std::size_t count = std::min(block_rows, static_cast<std::size_t>(left));
  block_values_.resize(channels_ * count);
  block_times_.resize(count);
  block_bad_.clear();
  rows_.read(count, block_values_.data(), count, block_times_.data(), block_bad_);
  auto bad = block_bad_.begin();
  for (std::size_t i = 0; i < count; ++i) {
    const bool grows = times_.empty() || block_times_[i] > times_.back();
    if (grows) {
      times_.push_back(block_times_[i]);
      for (std::size_t c = 0; c < channels_; ++c) values_.push_back(block_values_[c * count + i]);
      bad_.resize(values_.size(), 0);
    }
    for (; bad != block_bad_.end() && bad->row == i; ++bad) {
      if (grows) bad_[bad_.size() - channels_ + bad->channel] = 1;
    }
  }
  return true;
}

void EvenRows::at(double time_s, std::span<double> values, std::vector<bool>& good) {
  if (times_.empty() || time_s < times_[cursor_]) restart(time_s);
  while (true) {
    while (cursor_ + 1 < times_.size() && times_[cursor_ + 1] <= time_s) ++cursor_;
    if (cursor_ + nodes / 2 < times_.size() || !read_more()) break;
  }
  const std::size_t count = std::min(nodes, times_.size());
  std::size_t first = cursor_ + 1 > nodes / 2 ? cursor_ + 1 - nodes / 2 : 0;
  first = std::min(first, times_.size() - count);

  std::array<double, nodes> weight{};
  for (std::size_t i = 0; i < count; ++i) {
    weight[i] = 1.0;
    for (std::size_t j = 0; j < count; ++j) {
      if (j != i) weight[i] *= (time_s - times_[first + j]) / (times_[first + i] - times_[first + j]);
    }
  }
  good.assign(channels_, true);
  std::fill(values.begin(), values.end(), 0.0);
  for (std::size_t i = 0; i < count; ++i) {
    const std::size_t row = (first + i) * channels_;
    for (std::size_t c = 0; c < channels_; ++c) {
      values[c] += weight[i] * values_[row + c];
      if (bad_[row + c] != 0 && weight[i] != 0.0) good[c] = false;
    }
  }
}

}  // namespace stillmass::recording
