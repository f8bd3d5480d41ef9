#pragma once

#include <string>
#include <string_view>

namespace stillmass::report {

/// A length in units of the drawing with one decimal at most: "12", "12.5".
std::string px(double length);

/// Width of a text set in a sans-serif face of that size, estimated: 0.6 of the size for each character.
double text_width(std::string_view text, double size);

enum class Anchor { start, middle, end };

/// How a stroke or a fill looks: a role of the palette, which stands as class and as attribute.
struct Stroke {
  std::string_view role = "ink";
  double width = 1.0;
  std::string_view dash{};  ///< "6 3"; empty: solid
};

/// Collects the elements of a drawing. Every text is escaped here.
class SvgWriter {
 public:
  void line(double x1, double y1, double x2, double y2, const Stroke& stroke);
  void path(std::string_view d, const Stroke& stroke);
  void fill(std::string_view d, std::string_view role, double opacity = 1.0);
  void rectangle(double x, double y, double width, double height, std::string_view fill_role, double opacity = 1.0);
  void frame(double x, double y, double width, double height, const Stroke& stroke, std::string_view fill_role = {});
  void circle(double x, double y, double radius, const Stroke& stroke, std::string_view fill_role = {});
  void text(double x, double y, std::string_view words, Anchor anchor = Anchor::start, double size = 12.0,
            std::string_view role = "ink");
  /// Around the middle, on a patch of paper, so that it can be read over lines.
  void patch_text(double x, double y, std::string_view words, double size = 12.0);
  /// Ends at the point, rising from the left below.
  void slanted_text(double x, double y, std::string_view words, double size = 12.0);
  /// Reads from below to above.
  void upright_text(double x, double y, std::string_view words, double size = 12.0, std::string_view role = "ink");
  /// What follows is drawn in coordinates of this rectangle, and only inside it, until `close`.
  void open_window(double x, double y, double width, double height);
  void close_window();
  void raw(std::string_view svg) { out_ += svg; }

  /// The whole as one <svg> with a title and a description for those who do not see it.
  std::string document(double width, double height, std::string_view title, std::string_view description) const;

 private:
  std::string out_;
};

}  // namespace stillmass::report
