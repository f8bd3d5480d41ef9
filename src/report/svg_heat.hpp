#pragma once

#include "stillmass/report/chart.hpp"

#include "report/ruler.hpp"
#include "report/svg_writer.hpp"

namespace stillmass::report {

/// Darkness of a heat map's cell: 0 at the lowest value, `heat_levels` - 1 at the highest.
inline constexpr int heat_levels = 16;
int heat_level(double value, Scale scale, base::Interval range);

/// The map as one path for each level of darkness, cells of equal level in a row joined.
void draw_heat_map(SvgWriter& out, const HeatMap& map, const Ruler& x, const Ruler& y);

/// The scale beside the map, 14 wide, its numbers and title to the right.
void draw_heat_scale(SvgWriter& out, const HeatMap& map, double left, double top, double height);

}  // namespace stillmass::report
