#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/speed_curve.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::rotation {

struct WaterfallOptions {
  std::vector<std::size_t> channels;       ///< positions in `Recording::channels`; empty: all vibration channels
  std::size_t max_rows = 200;              ///< >= 1
  std::size_t max_lines = 1000;            ///< >= 1; more are reduced by keeping the highest of neighbours
  double resolution_hz = 0.0;              ///< 0: chosen from the duration, 0.25 to 5 Hz
  std::optional<double> max_frequency_hz;  ///< absent: half rate
  spectral::Window window = spectral::Window::hann;
};

struct WaterfallRow {
  double time_s = 0.0;             ///< middle of the row
  std::optional<double> speed_hz;  ///< there; absent where the speed is not known
  std::vector<double> amplitude;   ///< r.m.s. per line, SI; empty where no sample was valid
};

/// Spectra of one channel against time and speed. Within a row and within a reduced line the highest value is kept, so
/// that no peak is lost; a noise floor is raised by that.
struct Waterfall {
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  std::vector<double> lines_hz;  ///< middle of each (reduced) line
  double resolution_hz = 0.0;    ///< of the spectra before reduction
  std::vector<WaterfallRow> rows;
};

/// One waterfall a channel over the frames of `range` (one segment), rows of equal length with at least one block of
/// samples each. `curve` may be null. Memory: rows times lines. Throws `Error` (usage) for a resolution that the range
/// cannot give.
std::vector<Waterfall> waterfalls(const recording::Reader& reader, recording::FrameRange range, const SpeedCurve* curve,
                                  const WaterfallOptions& options, const base::Context& context);

}  // namespace stillmass::rotation
