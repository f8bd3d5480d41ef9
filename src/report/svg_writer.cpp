#include "report/svg_writer.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "stillmass/report/page.hpp"

#include "report/palette.hpp"

namespace stillmass::report {

namespace {

std::string stroke_attributes(const Stroke& stroke) {
  std::string text = fmt::format("class=\"l-{}\" stroke=\"{}\" stroke-width=\"{}\" fill=\"none\"", stroke.role,
                                 light(stroke.role), stroke.width);
  if (!stroke.dash.empty()) text += fmt::format(" stroke-dasharray=\"{}\"", stroke.dash);
  return text;
}

/// Stroke and, if there is one, fill.
std::string shape_attributes(const Stroke& stroke, std::string_view fill_role) {
  if (fill_role.empty()) return stroke_attributes(stroke);
  return fmt::format("class=\"l-{} f-{}\" stroke=\"{}\" stroke-width=\"{}\" fill=\"{}\"", stroke.role, fill_role,
                     light(stroke.role), stroke.width, light(fill_role));
}

std::string fill_attributes(std::string_view role, double opacity) {
  std::string text = fmt::format("class=\"f-{}\" fill=\"{}\"", role, light(role));
  if (opacity < 1.0) text += fmt::format(" fill-opacity=\"{:.3g}\"", opacity);
  return text;
}

constexpr std::string_view name(Anchor anchor) {
  return anchor == Anchor::start ? "start" : anchor == Anchor::middle ? "middle" : "end";
}

}  // namespace

std::string px(double length) {
  const double tenths = std::round(length * 10.0);
  if (std::fmod(tenths, 10.0) == 0.0) return fmt::format("{:.0f}", tenths / 10.0 + 0.0);
  return fmt::format("{:.1f}", tenths / 10.0);
}

double text_width(std::string_view text, double size) {
  const auto letters = std::count_if(text.begin(), text.end(), [](char c) { return (c & 0xC0) != 0x80; });
  return 0.6 * size * static_cast<double>(letters);
}

void SvgWriter::line(double x1, double y1, double x2, double y2, const Stroke& stroke) {
  path(fmt::format("M{} {}L{} {}", px(x1), px(y1), px(x2), px(y2)), stroke);
}

void SvgWriter::path(std::string_view d, const Stroke& stroke) {
  out_ += fmt::format("<path d=\"{}\" {}/>\n", d, stroke_attributes(stroke));
}

void SvgWriter::fill(std::string_view d, std::string_view role, double opacity) {
  out_ += fmt::format("<path d=\"{}\" {}/>\n", d, fill_attributes(role, opacity));
}

void SvgWriter::rectangle(double x, double y, double width, double height, std::string_view fill_role, double opacity) {
  out_ += fmt::format("<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" {}/>\n", px(x), px(y), px(width), px(height),
                      fill_attributes(fill_role, opacity));
}

void SvgWriter::frame(double x, double y, double width, double height, const Stroke& stroke,
                      std::string_view fill_role) {
  out_ += fmt::format("<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" {}/>\n", px(x), px(y), px(width), px(height),
                      shape_attributes(stroke, fill_role));
}

void SvgWriter::circle(double x, double y, double radius, const Stroke& stroke, std::string_view fill_role) {
  out_ += fmt::format("<circle cx=\"{}\" cy=\"{}\" r=\"{}\" {}/>\n", px(x), px(y), px(radius),
                      shape_attributes(stroke, fill_role));
}

void SvgWriter::text(double x, double y, std::string_view words, Anchor anchor, double size, std::string_view role) {
  out_ += fmt::format("<text x=\"{}\" y=\"{}\" text-anchor=\"{}\" font-size=\"{}\" {}>{}</text>\n", px(x), px(y),
                      name(anchor), size, fill_attributes(role, 1.0), escaped(words));
}

void SvgWriter::patch_text(double x, double y, std::string_view words, double size) {
  const double width = text_width(words, size) + 2.0;
  rectangle(x - 0.5 * width, y - 0.85 * size, width, 1.1 * size, "paper", 0.85);
  text(x, y, words, Anchor::middle, size);
}

void SvgWriter::slanted_text(double x, double y, std::string_view words, double size) {
  out_ += fmt::format(
      "<text transform=\"translate({} {}) rotate(-30)\" text-anchor=\"end\" font-size=\"{}\" {}>{}</text>\n", px(x),
      px(y), size, fill_attributes("ink", 1.0), escaped(words));
}

void SvgWriter::upright_text(double x, double y, std::string_view words, double size, std::string_view role) {
  out_ += fmt::format(
      "<text transform=\"translate({} {}) rotate(-90)\" text-anchor=\"middle\" font-size=\"{}\" {}>{}</text>\n", px(x),
      px(y), size, fill_attributes(role, 1.0), escaped(words));
}

void SvgWriter::open_window(double x, double y, double width, double height) {
  out_ += fmt::format("<svg x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" overflow=\"hidden\">\n", px(x), px(y),
                      px(width), px(height));
}

void SvgWriter::close_window() { out_ += "</svg>\n"; }

std::string SvgWriter::document(double width, double height, std::string_view title,
                                std::string_view description) const {
  return fmt::format(
      "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {} {}\" role=\"img\" "
      "font-family=\"system-ui, 'Liberation Sans', Arial, "
      "sans-serif\">\n<title>{}</title>\n<desc>{}</desc>\n{}</svg>\n",
      px(width), px(height), escaped(title), escaped(description), out_);
}

}  // namespace stillmass::report
