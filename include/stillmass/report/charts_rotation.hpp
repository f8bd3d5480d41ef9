#pragma once

#include <optional>
#include <string>

#include "stillmass/report/chart.hpp"
#include "stillmass/step/runup.hpp"

namespace stillmass::report {

/// Amplitude and phase of the orders of one channel against speed, critical speeds marked.
Chart order_chart(const step::RunupResult& result, const std::string& channel);

/// Speed against time.
std::optional<Chart> speed_chart(const step::RunupResult& result);

/// Spectra of one channel against time. Nothing where there is no waterfall of that channel.
std::optional<Chart> waterfall_chart(const step::RunupResult& result, const std::string& channel);

}  // namespace stillmass::report
