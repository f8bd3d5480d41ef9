#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/machine/running_speed.hpp"

namespace stillmass::machine {

/// Joins the lines at multiples of a speed near `start` (Hz) to one speed: order by order upwards, each with the speed
/// refined by those below. `left_out`: peaks that are never taken (of the line frequency). The first order must be
/// matched, or two others; absent otherwise.
std::optional<RunningSpeed> fit_speed(std::span<const Peak> peaks, std::span<const int> orders, double start_hz,
                                      double line_hz, const std::vector<bool>& left_out);

/// How many of the orders have a used line.
std::size_t orders_used(const RunningSpeed& speed);

}  // namespace stillmass::machine
