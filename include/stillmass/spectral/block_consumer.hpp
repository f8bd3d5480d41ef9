#pragma once

#include <cstdint>
#include <memory>
#include <span>
#include <vector>

#include "stillmass/recording/pass.hpp"
#include "stillmass/spectral/block_plan.hpp"

namespace stillmass::spectral {

/// One block of all channels of a recording, planar.
class Block {
 public:
  std::int64_t first_frame = 0;
  std::size_t frames = 0;

  std::span<const double> channel(std::size_t c) const { return {starts[c], frames}; }
  /// True where every sample of the channel is valid.
  bool is_valid(std::size_t c) const { return valid[c] != 0; }

  std::vector<const double*> starts;
  std::vector<char> valid;
};

/// A consumer that takes the blocks of a plan, whatever the chunks. Samples are copied only where a block lies across
/// two chunks.
class BlockConsumer : public recording::Consumer {
 public:
  std::int64_t lookahead() const final { return static_cast<std::int64_t>(plan_->length()) - 1; }
  void take(const recording::Chunk& chunk) final;

  const BlockPlan& plan() const { return *plan_; }

 protected:
  explicit BlockConsumer(BlockPlan plan);
  /// The partial that takes the blocks of `whole` that start in the range.
  BlockConsumer(const BlockConsumer& whole, recording::FrameRange owned);

  /// Blocks come in the order of the plan. The samples stand during the call.
  virtual void take_block(const Block& block) = 0;

 private:
  std::int64_t next_start() const;
  void advance();
  void note_invalid(const recording::Chunk& chunk);
  void give(std::int64_t first_of_samples);
  void take_from_carry(const recording::Chunk& chunk);
  void take_from(const recording::Chunk& chunk);
  void carry_over(const recording::Chunk& chunk);

  std::shared_ptr<const BlockPlan> plan_;
  std::size_t run_ = 0;  ///< the block that comes next: run and number in it
  std::int64_t in_run_ = 0;
  std::int64_t carry_first_ = 0;
  std::vector<std::vector<double>> carry_;                   ///< per channel: samples from the next block's start on
  std::vector<std::vector<recording::FrameRange>> invalid_;  ///< per channel: what the blocks to come may touch
  Block block_;
};

}  // namespace stillmass::spectral
