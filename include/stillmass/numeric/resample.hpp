#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace stillmass::numeric {

/// Samples on an even grid, with what the interpolation may have cost.
struct Resampled {
  std::vector<double> values;
  double error_max = 0.0;  ///< largest estimated interpolation error, unit of the values
  double error_rms = 0.0;
};

/// Samples taken at uneven times, at start + i / rate, i < count. Each value comes from the polynomial through the six
/// nearest samples; its error is stated as twice the term that the seventh would add (Newton's remainder with the next
/// divided difference). The statement holds where the signal ends well below the half rate (a quarter of it or less);
/// above, and with noise, it is of the right size but no bound. It knows nothing of aliasing.
/// times: ascending strictly, at least seven, of the length of values. The grid must lie within them (half a spacing
/// beyond is allowed). Throws `Error` (internal) otherwise.
Resampled to_even_grid(std::span<const double> times, std::span<const double> values, double start, double rate,
                       std::size_t count);

}  // namespace stillmass::numeric
