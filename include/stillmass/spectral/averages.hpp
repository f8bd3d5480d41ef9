#pragma once

#include <cstdint>
#include <span>
#include <vector>

#include "stillmass/spectral/block_plan.hpp"
#include "stillmass/spectral/window.hpp"

namespace stillmass::spectral {

/// Pairs of averaged blocks that share frames.
struct Overlap {
  double lag = 0.0;    ///< from start to start, as a fraction of a block, 0 to 1
  double pairs = 0.0;  ///< how many
};

/// What a mean over overlapping blocks is worth: with r_ij the overlap correlation of blocks i and j, as much as
/// K^2 / sum of r_ij^2 independent ones for the density of Gaussian noise. Source: Welch, IEEE Trans. AU-15 (1967) 70.
struct Averages {
  std::int64_t blocks = 0;
  double effective = 0.0;
  std::vector<Overlap> overlaps;
};

/// For blocks of `length` frames at those starts (ascending).
Averages averages(Window window, std::size_t length, std::span<const BlockRun> runs);

}  // namespace stillmass::spectral
