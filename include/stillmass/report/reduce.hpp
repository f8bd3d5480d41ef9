#pragma once

#include <cstddef>
#include <span>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// Points of a curve that a picture of `columns` columns can show. Each column keeps its first, lowest, highest and
/// last point, in their order, so that no peak and no dip is lost or moved: at most 4 points a column. The points whose
/// x is in `keep` stay. Columns are equally wide on the axis's scale. Curves that are short already, and curves whose x
/// does not rise, come back as they are. Points outside a logarithmic scale (<= 0) are dropped.
Segment reduced(const Segment& curve, Scale x_scale, std::size_t columns, std::span<const double> keep = {});

/// The band with at most `columns` columns: each keeps its lowest low and its highest high.
Band reduced(const Band& band, Scale x_scale, std::size_t columns);

/// The map with at most `columns` by `rows` tiles: each shows the highest value that it covers and stands where the
/// tile is centred. Tiles hold equal numbers of cells; the last of a row or column may hold fewer.
HeatMap reduced(const HeatMap& map, std::size_t columns, std::size_t rows);

/// The whole chart, with marks of `callouts` and vertical marks kept.
Chart reduced(const Chart& chart, std::size_t columns, std::size_t heat_columns, std::size_t heat_rows);

}  // namespace stillmass::report
