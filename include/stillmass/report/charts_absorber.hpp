#pragma once

#include <optional>

#include "stillmass/report/chart.hpp"
#include "stillmass/step/absorber.hpp"

namespace stillmass::report {

/// Response at the attachment point to one and the same force, without and with the absorber, around the natural
/// frequency; the forcing range shaded. The band holds the middle 95 % of the uncertain natural frequency (two standard
/// uncertainties either way). Nothing without an absorber.
std::optional<Chart> absorber_chart(const step::AbsorberResult& result);

/// Frequency of the absorber on a clamp against free length of its blade. Nothing without a blade.
std::optional<Chart> tuning_chart(const step::AbsorberResult& result);

}  // namespace stillmass::report
