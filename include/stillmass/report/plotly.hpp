#pragma once

#include <string>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// The chart as JSON text {"data": [...], "layout": {...}, "config": {...}, "meta": {...}} for plotly.js 3 and later.
/// Reduced to what a screen can show, numbers to 7 significant digits, no NaN or infinity, `<` as \u003c so that the
/// text may stand inside a script element. Colours are roles ("series-1", "quiet", "zone-bad", ...), which page.js
/// replaces by those of the light or dark scheme. `meta` says which heat maps are drawn by logarithm.
/// Throws what `check` throws.
std::string plotly_json(const Chart& chart);

}  // namespace stillmass::report
