#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/hits.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

struct RingDownOptions {
  std::vector<ResponseName> responses;     ///< of HitSearch
  std::string point;                       ///< the response to read; empty: the one that moves most
  std::optional<base::Interval> band_hz;   ///< modes are sought here
  std::optional<double> max_frequency_hz;  ///< default: a quarter of the rate
  std::string state = "stopped";
};

struct RingDownTest {
  std::vector<Mode> modes;   ///< by frequency, without modal mass
  std::size_t response = 0;  ///< that was read
  double line_hz = 0.0;
  std::vector<double> amplitude;  ///< mean magnitude of the decays' spectra, line k at k * line_hz
  std::vector<base::Finding> findings;
};

/// Modes from ring-downs without a force channel: least squares of decaying sinusoids on every decay, started at the
/// peaks of the mean spectrum; mean and scatter over decays. The logarithmic decrement stands beside it as a second
/// method. Refuses `no-usable-hit` and `no-mode`.
base::Answer<RingDownTest> ring_down_test(std::span<const HitBlocks> decays, const RingDownOptions& options,
                                          const base::Context& context);

}  // namespace stillmass::modal
