#pragma once

#include <cmath>
#include <cstddef>
#include <functional>
#include <limits>
#include <utility>
#include <vector>

#include "support/memory_reader.hpp"

namespace stillmass::tests {

/// Samples of a signal at 0, 1/rate, 2/rate, ...
inline std::vector<double> sampled(double rate_hz, double duration_s, const std::function<double(double)>& signal) {
  std::vector<double> out(static_cast<std::size_t>(std::llround(rate_hz * duration_s)));
  for (std::size_t i = 0; i < out.size(); ++i) out[i] = signal(static_cast<double>(i) / rate_hz);
  return out;
}

/// The samples with some of them missing.
inline std::vector<double> without(std::vector<double> samples, recording::FrameRange missing) {
  for (auto i = missing.begin; i < missing.end; ++i) {
    samples[static_cast<std::size_t>(i)] = std::numeric_limits<double>::quiet_NaN();
  }
  return samples;
}

}  // namespace stillmass::tests
