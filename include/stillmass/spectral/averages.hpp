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
  double pairs = 0.0;  ///< how many; weighted: K^2 times the sum of w_i w_j over them, with the weights' sum 1
};

/// What a mean over K overlapping blocks is worth: with w_i the weights and r_ij the overlap correlation of blocks i
/// and j, as much as (sum of w_i)^2 / sum of w_i w_j r_ij^2 independent ones for the density of Gaussian noise; of
/// equal weights K^2 / sum of r_ij^2. Source: Welch, IEEE Trans. AU-15 (1967) 70, with weights.
struct Averages {
  std::int64_t blocks = 0;
  double effective = 0.0;
  std::vector<Overlap> overlaps;  ///< by lag; of unequal weights the first has lag 0 and holds what these add:
                                  ///< (K^2 sum of w_i^2 - K) / 2
};

/// For blocks of `length` frames at those starts (ascending). `decay`, 0 to 1: each block weighs so much of the one
/// after it (exponential averaging); 1: all weigh the same.
Averages averages(Window window, std::size_t length, std::span<const BlockRun> runs, double decay = 1.0);

}  // namespace stillmass::spectral
