#include "report/svg_panel.hpp"

#include <array>

#include <fmt/format.h>

#include "report/palette.hpp"
#include "report/svg_heat.hpp"

namespace stillmass::report {

namespace {

constexpr double small_text = 11.0;

/// The sign of a point: differs by index, so that a print without colour can be read.
std::string marker(double x, double y, std::size_t index) {
  static constexpr std::array shapes{
      "m-3 0a3 3 0 1 0 6 0a3 3 0 1 0-6 0z",
      "m-3-3h6v6h-6z",
      "m0-4l4 4l-4 4l-4-4z",
      "m-3.5 3h7l-3.5-6.5z",
      "m-3.5-3h7l-3.5 6.5z",
      "m-1-4h2v3h3v2h-3v3h-2v-3h-3v-2h3z",
  };
  return fmt::format("M{} {}{}", px(x), px(y), shapes[index % shapes.size()]);
}

void draw_zones(SvgWriter& out, const Panel& panel, const PanelFrame& frame) {
  for (const Zone& zone : panel.zones) {
    const bool across = zone.direction == Direction::horizontal;
    const Ruler& ruler = across ? frame.y : frame.x;
    const double from = ruler(zone.from && ruler.has(*zone.from) ? *zone.from : ruler.range().lo);
    if (zone.to && !ruler.has(*zone.to)) continue;
    const double to = ruler(zone.to.value_or(ruler.range().hi));
    const double opacity = zone.tone == Tone::neutral ? 0.15 : 0.13;
    if (across) {
      out.rectangle(0.0, std::min(from, to), frame.width, std::abs(to - from), role_of(zone.tone), opacity);
    } else {
      out.rectangle(std::min(from, to), 0.0, std::abs(to - from), frame.height, role_of(zone.tone), opacity);
    }
  }
}

void draw_grid(SvgWriter& out, const PanelFrame& frame, const std::vector<Tick>& x_ticks,
               const std::vector<Tick>& y_ticks) {
  std::string lines;
  for (const Tick& tick : x_ticks) lines += fmt::format("M{} 0V{}", px(frame.x(tick.at)), px(frame.height));
  for (const Tick& tick : y_ticks) lines += fmt::format("M0 {}H{}", px(frame.y(tick.at)), px(frame.width));
  out.path(lines, {"grid", 1.0});
}

void draw_band(SvgWriter& out, const Band& band, const PanelFrame& frame, const Look& look, double opacity) {
  std::string d;
  for (std::size_t i = 0; i < band.x.size(); ++i) {
    const double high = frame.y.has(band.high[i]) ? frame.y(band.high[i]) : frame.height;
    d += fmt::format("{}{} {}", d.empty() ? "M" : "L", px(frame.x(band.x[i])), px(high));
  }
  for (std::size_t i = band.x.size(); i-- > 0;) {
    const double low = frame.y.has(band.low[i]) ? frame.y(band.low[i]) : frame.height;
    d += fmt::format("L{} {}", px(frame.x(band.x[i])), px(low));
  }
  if (!d.empty()) out.fill(d + "z", look.role, opacity);
}

/// Path of a curve; where the scale has no place for a value the pen is lifted.
std::string curve(const Segment& segment, const PanelFrame& frame, bool steps) {
  std::string d;
  bool down = false;
  for (std::size_t i = 0; i < segment.x.size(); ++i) {
    if (!frame.x.has(segment.x[i]) || !frame.y.has(segment.y[i])) {
      down = false;
      continue;
    }
    const std::string x = px(frame.x(segment.x[i])), y = px(frame.y(segment.y[i]));
    d += !down ? fmt::format("M{} {}", x, y) : steps ? fmt::format("H{}V{}", x, y) : fmt::format("L{} {}", x, y);
    down = true;
  }
  return d;
}

void draw_bars(SvgWriter& out, const Series& series, const PanelFrame& frame, const Look& look) {
  const double foot = frame.y.foot();
  for (const Segment& segment : series.segments) {
    double slot = frame.width;
    for (std::size_t i = 1; i < segment.x.size(); ++i) {
      slot = std::min(slot, std::abs(frame.x(segment.x[i]) - frame.x(segment.x[i - 1])));
    }
    const double width = std::min(0.7 * slot, 56.0);
    for (std::size_t i = 0; i < segment.x.size(); ++i) {
      if (!frame.x.has(segment.x[i]) || !frame.y.has(segment.y[i])) continue;
      const double top = frame.y(segment.y[i]);
      out.rectangle(frame.x(segment.x[i]) - 0.5 * width, std::min(top, foot), width, std::abs(top - foot), look.role,
                    0.85);
    }
  }
}

void draw_errors(SvgWriter& out, const Series& series, const PanelFrame& frame) {
  std::string d;
  for (std::size_t i = 0; i < series.error.size(); ++i) {
    const double value = series.segments.front().y[i];
    const double x = frame.x(series.segments.front().x[i]);
    const double high = frame.y(value + series.error[i]);
    const double low = frame.y.has(value - series.error[i]) ? frame.y(value - series.error[i]) : frame.height;
    d += fmt::format("M{0} {2}V{1}M{3} {2}h8M{3} {1}h8", px(x), px(low), px(high), px(x - 4.0));
  }
  if (!d.empty()) out.path(d, {"ink", 1.2});
}

void draw_series(SvgWriter& out, const Series& series, const PanelFrame& frame, const Look& look) {
  const Stroke stroke{look.role, series.quiet ? 1.0 : 1.5, series.quiet ? "" : dash(look.index)};
  std::string lines, signs;
  for (const Segment& segment : series.segments) {
    if (series.style == Style::line || series.style == Style::step) {
      lines += curve(segment, frame, series.style == Style::step);
    }
    const bool dots = series.style == Style::points || series.style == Style::stems || segment.x.size() == 1;
    for (std::size_t i = 0; i < segment.x.size() && series.style != Style::bars; ++i) {
      if (!frame.x.has(segment.x[i]) || !frame.y.has(segment.y[i])) continue;
      const double x = frame.x(segment.x[i]), y = frame.y(segment.y[i]);
      if (series.style == Style::stems) lines += fmt::format("M{} {}V{}", px(x), px(frame.y.foot()), px(y));
      if (dots) signs += marker(x, y, look.index);
    }
  }
  if (series.style == Style::bars) draw_bars(out, series, frame, look);
  if (!lines.empty()) out.path(lines, series.style == Style::stems ? Stroke{look.role, 1.5} : stroke);
  if (!signs.empty()) out.fill(signs, look.role);
  draw_errors(out, series, frame);
}

void draw_marks(SvgWriter& out, const Panel& panel, const PanelFrame& frame, Direction direction) {
  for (const Mark& mark : panel.marks) {
    if (mark.direction != direction) continue;
    const bool upright = direction == Direction::vertical;
    const Ruler& ruler = upright ? frame.x : frame.y;
    if (!ruler.has(mark.at) || !ruler.shows(mark.at)) continue;
    const double at = ruler(mark.at);
    if (upright) out.line(at, 0.0, at, frame.height, stroke_of(mark.kind));
    if (!upright) out.line(0.0, at, frame.width, at, stroke_of(mark.kind));
  }
}

void draw_callouts(SvgWriter& out, const Panel& panel, const PanelFrame& frame) {
  const Box edge{2.0, 2.0, frame.width - 2.0, frame.height - 2.0};
  std::vector<Box> taken;
  for (const Callout& callout : panel.callouts) {
    if (!frame.x.shows(callout.x) || !frame.y.shows(callout.y)) continue;
    const double x = frame.x(callout.x), y = frame.y(callout.y);
    out.circle(x, y, 3.5, {"ink", 1.2});
    taken.push_back({x - 4.0, y - 4.0, x + 4.0, y + 4.0});
  }
  for (const Callout& callout : panel.callouts) {
    if (!frame.x.shows(callout.x) || !frame.y.shows(callout.y)) continue;
    const double width = text_width(callout.text, small_text);
    const Box box = placed_beside(frame.x(callout.x), frame.y(callout.y), width, 14.0, edge, taken);
    taken.push_back(box);
    out.patch_text(0.5 * (box.left + box.right), box.bottom - 3.0, callout.text, small_text);
  }
}

}  // namespace

Stroke stroke_of(MarkKind kind) {
  switch (kind) {
    case MarkKind::natural_frequency:
      return {role_of(kind), 1.3, ""};
    case MarkKind::forcing_frequency:
      return {role_of(kind), 1.2, "8 3 2 3"};
    case MarkKind::limit:
      return {role_of(kind), 1.6, "9 4"};
    case MarkKind::plain:
      break;
  }
  return {role_of(kind), 1.2, "2 3"};
}

void draw_inside(SvgWriter& out, const Panel& panel, const PanelFrame& frame, const Looks& looks,
                 const std::vector<Tick>& x_ticks, const std::vector<Tick>& y_ticks) {
  out.open_window(frame.left, frame.top, frame.width, frame.height);
  draw_zones(out, panel, frame);
  draw_grid(out, frame, x_ticks, y_ticks);
  if (panel.heat_map) draw_heat_map(out, *panel.heat_map, frame.x, frame.y);
  draw_marks(out, panel, frame, Direction::vertical);  // a peak on its mark stays in sight
  for (const Band& band : panel.bands) draw_band(out, band, frame, looks.of(band), panel.series.empty() ? 0.6 : 0.22);
  for (const Series& series : panel.series) draw_series(out, series, frame, looks.of(series));
  draw_marks(out, panel, frame, Direction::horizontal);
  draw_callouts(out, panel, frame);
  out.close_window();
}

void draw_sample(SvgWriter& out, double x, double y, const LegendEntry& entry) {
  if (entry.band) {
    out.rectangle(x, y - 5.0, 24.0, 10.0, entry.look.role, 0.3);
  } else if (entry.style == Style::bars) {
    out.rectangle(x + 6.0, y - 5.0, 12.0, 10.0, entry.look.role, 0.85);
  } else if (entry.style == Style::points || entry.style == Style::stems) {
    out.fill(marker(x + 12.0, y, entry.look.index), entry.look.role);
  } else {
    out.line(x, y, x + 24.0, y, {entry.look.role, 2.0, dash(entry.look.index)});
  }
}

}  // namespace stillmass::report
