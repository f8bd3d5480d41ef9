#pragma once

#include <string>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// The chart as SVG text, 760 units wide, as high as its panels need. Series differ by dash pattern and marker as well
/// as by colour, so that a black and white print can be read. The colours stand as attributes (the text is complete by
/// itself) and as classes (a style sheet may change them). Throws what `check` throws.
std::string svg(const Chart& chart);

}  // namespace stillmass::report
