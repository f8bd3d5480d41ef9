#include "stillmass/spectral/block_consumer.hpp"

#include <algorithm>
#include <limits>
#include <utility>

namespace stillmass::spectral {

using recording::Chunk;
using recording::FrameRange;

BlockConsumer::BlockConsumer(BlockPlan plan) : plan_(std::make_shared<const BlockPlan>(std::move(plan))) {}

BlockConsumer::BlockConsumer(const BlockConsumer& whole, FrameRange owned)
    : plan_(std::make_shared<const BlockPlan>(whole.plan_->starting_in(owned))) {}

std::int64_t BlockConsumer::next_start() const {
  if (run_ == plan_->runs().size()) return std::numeric_limits<std::int64_t>::max() / 2;
  return plan_->runs()[run_].start(in_run_);
}

void BlockConsumer::advance() {
  if (++in_run_ < plan_->runs()[run_].count) return;
  ++run_;
  in_run_ = 0;
}

void BlockConsumer::take(const Chunk& chunk) {
  if (run_ == plan_->runs().size()) return;
  const auto n = static_cast<std::int64_t>(plan_->length());
  if (carry_.empty()) {
    carry_.resize(chunk.channels());
    invalid_.resize(chunk.channels());
    block_.frames = plan_->length();
    block_.starts.resize(chunk.channels());
    block_.valid.resize(chunk.channels());
  }
  note_invalid(chunk);
  if (next_start() < chunk.range().begin) take_from_carry(chunk);
  if (next_start() < chunk.range().begin) return;
  while (next_start() + n <= chunk.range().end) take_from(chunk);
  if (next_start() < chunk.range().end) carry_over(chunk);
  if (run_ == plan_->runs().size()) carry_ = {};  // a partial may wait long for its merge
}

/// Blocks that start before the chunk: it supplies their ends.
void BlockConsumer::take_from_carry(const Chunk& chunk) {
  const auto n = static_cast<std::int64_t>(plan_->length());
  const auto ends = static_cast<std::ptrdiff_t>(std::min(chunk.frames, plan_->length() - 1));
  for (std::size_t c = 0; c < carry_.size(); ++c) {
    const auto samples = chunk.channel(c);
    carry_[c].reserve(plan_->length() + static_cast<std::size_t>(ends));  // less than a block is held
    carry_[c].insert(carry_[c].end(), samples.begin(), samples.begin() + ends);
  }
  const std::int64_t carry_end = carry_first_ + static_cast<std::int64_t>(carry_.front().size());
  while (next_start() < chunk.range().begin && next_start() + n <= carry_end) {
    for (std::size_t c = 0; c < carry_.size(); ++c) block_.starts[c] = carry_[c].data();
    give(carry_first_);
  }
  const std::int64_t done = std::min(next_start(), carry_end) - carry_first_;
  for (auto& samples : carry_) samples.erase(samples.begin(), samples.begin() + done);
  carry_first_ += done;
}

void BlockConsumer::take_from(const Chunk& chunk) {
  for (std::size_t c = 0; c < carry_.size(); ++c) block_.starts[c] = chunk.channel(c).data();
  give(chunk.first_frame);
}

void BlockConsumer::carry_over(const Chunk& chunk) {
  const std::int64_t from = next_start() - chunk.first_frame;
  for (std::size_t c = 0; c < carry_.size(); ++c) {
    const auto samples = chunk.channel(c);
    carry_[c].assign(samples.begin() + from, samples.end());
  }
  carry_first_ = next_start();
}

/// `block_.starts` point to the sample of the frame `first_of_samples` of each channel.
void BlockConsumer::give(std::int64_t first_of_samples) {
  const FrameRange frames{next_start(), next_start() + static_cast<std::int64_t>(plan_->length())};
  block_.first_frame = frames.begin;
  for (std::size_t c = 0; c < carry_.size(); ++c) {
    block_.starts[c] += frames.begin - first_of_samples;
    block_.valid[c] = std::none_of(invalid_[c].begin(), invalid_[c].end(), [&](const FrameRange& hole) {
      return hole.begin < frames.end && frames.begin < hole.end;
    });
  }
  take_block(block_);
  advance();
}

void BlockConsumer::note_invalid(const Chunk& chunk) {
  for (std::size_t c = 0; c < invalid_.size(); ++c) {
    std::erase_if(invalid_[c], [&](const FrameRange& hole) { return hole.end <= next_start(); });
    if (chunk.all_valid()) continue;
    std::int64_t known = chunk.range().begin;
    for (const FrameRange& valid : chunk.valid[c]) {
      if (valid.begin > known) invalid_[c].push_back({known, valid.begin});
      known = valid.end;
    }
    if (known < chunk.range().end) invalid_[c].push_back({known, chunk.range().end});
  }
}

}  // namespace stillmass::spectral
