#pragma once

#include "stillmass/report/chart.hpp"

#include "report/looks.hpp"
#include "report/ruler.hpp"
#include "report/svg_labels.hpp"
#include "report/svg_writer.hpp"

namespace stillmass::report {

/// A panel's place in the drawing and its rulers. The rulers are in coordinates of the panel: x from 0 to `width`, y
/// from `height` at the foot to 0.
struct PanelFrame {
  double left, top, width, height;
  Ruler x, y;
};

/// Everything inside the frame: zones, heat map, grid, bands, series, marks, callouts.
void draw_inside(SvgWriter& out, const Panel& panel, const PanelFrame& frame, const Looks& looks,
                 const std::vector<Tick>& x_ticks, const std::vector<Tick>& y_ticks);

/// The sample of a legend, 24 wide, around the height y.
void draw_sample(SvgWriter& out, double x, double y, const LegendEntry& entry);

/// How a mark's line looks.
Stroke stroke_of(MarkKind kind);

}  // namespace stillmass::report
