#pragma once

#include <vector>

#include "stillmass/step/spectrum.hpp"

#include "report/json_parts.hpp"

namespace stillmass::report {

/// Amplitudes in the trade's unit and the result's detector; frequencies in Hz, speed in rpm.
Json spectrum(const step::SpectrumResult& result);
Json deflections(const std::vector<step::OperatingDeflection>& shapes);

}  // namespace stillmass::report
