#pragma once

#include <optional>

#include "stillmass/report/chart.hpp"
#include "stillmass/step/bump.hpp"

namespace stillmass::report {

/// The averaged frequency response of one response channel of a hammer test: magnitude with the fitted curve, phase,
/// coherence, natural frequencies marked. Nothing without a force channel.
std::optional<Chart> response_chart(const step::BumpResult& result, std::size_t response);

/// The mean spectrum of ring-downs. Nothing where there was a force.
std::optional<Chart> ring_down_chart(const step::BumpResult& result);

}  // namespace stillmass::report
