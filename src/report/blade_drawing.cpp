#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/report/spec_sheet.hpp"

#include "report/svg_writer.hpp"

namespace stillmass::report {

namespace {

// The side view: clamp at the left, blade along `axis`, mass at the right. All in units of the drawing.
constexpr double page_width = 720.0, page_height = 330.0;
constexpr double clamp_right = 110.0, mass_left = 390.0, mass_right = 470.0, axis = 150.0;
constexpr double mass_middle = 0.5 * (mass_left + mass_right), half_mass = 34.0, travel = 26.0;
constexpr double section_left = 575.0, section_top = 130.0;

const Stroke outline{"ink", 1.6};
const Stroke thin{"muted", 1.0};
const Stroke ghost{"muted", 1.0, "5 4"};

/// Four significant digits, no zeros behind the last that counts.
std::string number(double value) { return fmt::format("{:.4g}", value); }

/// A length in m as "245 mm"; the letter where it is not known.
std::string length(std::optional<double> metres, const char* letter) {
  return metres ? fmt::format("{} = {} mm", letter, number(*metres * 1e3)) : letter;
}

std::string arrow_head(double x, double y, double dx, double dy) {
  // Tip at (x, y), pointing along the unit vector (dx, dy).
  const double bx = x - 8.0 * dx, by = y - 8.0 * dy;
  return fmt::format("M{} {}L{} {}L{} {}z", px(x), px(y), px(bx + 3.0 * dy), px(by - 3.0 * dx), px(bx - 3.0 * dy),
                     px(by + 3.0 * dx));
}

void double_arrow(SvgWriter& out, double x1, double y1, double x2, double y2, const Stroke& stroke) {
  const double size = std::max(std::abs(x2 - x1), std::abs(y2 - y1));
  const double dx = (x2 - x1) / size, dy = (y2 - y1) / size;
  out.line(x1, y1, x2, y2, stroke);
  out.fill(arrow_head(x2, y2, dx, dy) + arrow_head(x1, y1, -dx, -dy), stroke.role);
}

/// Level dimension line at y between x1 and x2, its number on it.
void level_dimension(SvgWriter& out, double x1, double x2, double y, double from_y, const std::string& text) {
  out.line(x1, from_y, x1, y + 5.0, thin);
  out.line(x2, from_y, x2, y + 5.0, thin);
  double_arrow(out, x1, y, x2, y, thin);
  out.patch_text(0.5 * (x1 + x2), y - 5.0, text, 13.0);
}

void draw_clamp(SvgWriter& out) {
  std::string hatch;
  for (double y = axis - 66.0; y < axis + 70.0; y += 11.0) hatch += fmt::format("M36 {}l14-11", px(y + 6.0));
  out.path(hatch, thin);
  out.line(50.0, axis - 72.0, 50.0, axis + 72.0, outline);
  out.frame(50.0, axis - 44.0, clamp_right - 50.0, 40.0, outline, "grid");
  out.frame(50.0, axis + 4.0, clamp_right - 50.0, 40.0, outline, "grid");
  out.line(80.0, axis - 56.0, 80.0, axis + 56.0, {"ink", 3.0});
  out.text(36.0, axis - 82.0, "clamp, on the machine", Anchor::start, 12.0, "muted");
}

void draw_mass(SvgWriter& out, const BladeDrawing& drawing) {
  for (const double shift : {-travel, travel}) {
    const double top = axis - half_mass + shift;
    out.path(fmt::format("M{} {}h{}v{}h-{}z", px(mass_left), px(top), px(mass_right - mass_left), px(2.0 * half_mass),
                         px(mass_right - mass_left)),
             ghost);
  }
  out.frame(50.0, axis - 4.0, mass_middle - 50.0, 8.0, outline, "paper");
  out.frame(mass_left, axis - half_mass, mass_right - mass_left, 2.0 * half_mass, outline, "grid");
  out.text(mass_middle, axis + 5.0, drawing.tip_mass_kg ? number(*drawing.tip_mass_kg) + " kg" : std::string("m"),
           Anchor::middle, 14.0);
}

void draw_motion(SvgWriter& out, const BladeDrawing& drawing) {
  const double x = mass_right + 18.0;
  double_arrow(out, x, axis - travel - 8.0, x, axis + travel + 8.0, outline);
  out.text(x + 9.0, axis - 3.0, drawing.travel_m ? "±" + number(*drawing.travel_m * 1e3) + " mm" : "travel",
           Anchor::start, 12.0);
  out.text(x + 9.0, axis + 13.0, "keep free", Anchor::start, 12.0, "muted");
  if (!drawing.direction.empty()) {
    out.text(mass_right, axis - half_mass - travel - 34.0, "motion: " + drawing.direction, Anchor::middle, 12.0);
  }
}

void draw_adjustment(SvgWriter& out, const BladeDrawing& drawing) {
  if (!drawing.adjust_m) return;
  const double y = axis - half_mass - travel - 14.0;
  double_arrow(out, mass_middle - 34.0, y, mass_middle + 34.0, y, thin);
  out.text(mass_middle - 42.0, y + 4.0, fmt::format("to tune: ±{} mm", number(*drawing.adjust_m * 1e3)), Anchor::end,
           12.0);
}

/// A dashpot between the mass and the ground below it.
void draw_damper(SvgWriter& out, const BladeDrawing& drawing) {
  if (drawing.damper.empty()) return;
  const double top = axis + half_mass, ground = axis + 118.0, x = mass_right - 16.0;
  out.path(
      fmt::format("M{0} {1}V{2}M{3} {2}h18M{4} {5}v26h26v-26M{0} {6}V{7}M{8} {7}h44", px(x), px(top), px(ground - 28.0),
                  px(x - 9.0), px(x - 13.0), px(ground - 40.0), px(ground - 14.0), px(ground), px(x - 22.0)),
      outline);
  out.text(x + 30.0, ground - 22.0, drawing.damper, Anchor::start, 12.0);
}

void draw_section(SvgWriter& out, const BladeDrawing& drawing) {
  constexpr double wide = 90.0, thick = 16.0;
  out.text(section_left, section_top - 22.0,
           drawing.blades > 1 ? fmt::format("{} blades, each", drawing.blades) : "blade, cut", Anchor::start, 12.0,
           "muted");
  out.frame(section_left, section_top, wide, thick, outline, "grid");
  level_dimension(out, section_left, section_left + wide, section_top + 44.0, section_top + thick + 3.0,
                  length(drawing.width_m, "b"));
  out.text(section_left, section_top + 72.0, length(drawing.thickness_m, "t"), Anchor::start, 13.0);
  if (!drawing.material.empty())
    out.text(section_left, section_top + 90.0, drawing.material, Anchor::start, 12.0, "muted");
}

}  // namespace

std::string svg(const BladeDrawing& drawing) {
  SvgWriter out;
  draw_clamp(out);
  draw_damper(out, drawing);
  draw_mass(out, drawing);
  draw_motion(out, drawing);
  draw_adjustment(out, drawing);
  draw_section(out, drawing);
  level_dimension(out, clamp_right, mass_middle, page_height - 22.0, axis + half_mass + 6.0,
                  length(drawing.free_length_m, "L"));
  out.text(page_width - 8.0, page_height - 8.0, "not to scale; the numbers count", Anchor::end, 11.0, "muted");
  return out.document(
      page_width, page_height, "Blade-spring absorber",
      fmt::format("Side view: a blade held in a clamp at its left end, a mass of {} at its right end, free "
                  "length {}; section of the blade: {}, {}.",
                  drawing.tip_mass_kg ? number(*drawing.tip_mass_kg) + " kg" : std::string("m"),
                  length(drawing.free_length_m, "L"), length(drawing.width_m, "b"), length(drawing.thickness_m, "t")));
}

}  // namespace stillmass::report
