#include "stillmass/report/machine_sketch.hpp"

#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "report/svg_labels.hpp"
#include "report/svg_writer.hpp"

namespace stillmass::report {

namespace {

using Position = std::array<double, 3>;

constexpr double page_width = 720.0, most_height = 320.0, edge = 56.0, text_size = 12.0;
constexpr double slant_x = 0.42, slant_y = 0.30;  ///< y, away from the viewer, goes to the right and up

struct Place {
  double x, y;
};

/// The room around the points, a little larger, and its projection to the drawing.
class View {
 public:
  explicit View(const std::vector<SketchPoint>& points) {
    for (const SketchPoint& point : points) {
      if (!point.position_m) continue;
      for (std::size_t i = 0; i < 3; ++i) {
        lo_[i] = known_ ? std::min(lo_[i], (*point.position_m)[i]) : (*point.position_m)[i];
        hi_[i] = known_ ? std::max(hi_[i], (*point.position_m)[i]) : (*point.position_m)[i];
      }
      known_ = true;
    }
    const double size = std::max({hi_[0] - lo_[0], hi_[1] - lo_[1], hi_[2] - lo_[2], 0.1});
    for (std::size_t i = 0; i < 3; ++i) {
      lo_[i] -= 0.08 * size;
      hi_[i] += 0.08 * size;
    }
    const Place far = flat(hi_), near = flat(lo_);
    scale_ = std::min((page_width - 2.0 * edge) / (far.x - near.x), (most_height - 2.0 * edge) / (far.y - near.y));
    height_ = 2.0 * edge + scale_ * (far.y - near.y);
    left_ = 0.5 * (page_width - scale_ * (far.x - near.x));
  }

  bool known() const { return known_; }
  double height() const { return height_; }
  Place of(const Position& position) const {
    const Place place = flat(position), near = flat(lo_);
    return {left_ + scale_ * (place.x - near.x), height_ - edge - scale_ * (place.y - near.y)};
  }
  Position corner(int which) const {
    return {which & 1 ? hi_[0] : lo_[0], which & 2 ? hi_[1] : lo_[1], which & 4 ? hi_[2] : lo_[2]};
  }

 private:
  static Place flat(const Position& p) { return {p[0] + slant_x * p[1], p[2] + slant_y * p[1]}; }

  Position lo_{}, hi_{};
  bool known_ = false;
  double scale_ = 1.0, left_ = 0.0, height_ = 0.0;
};

void draw_box(SvgWriter& out, const View& view) {
  for (int from = 0; from < 8; ++from) {
    for (const int axis : {1, 2, 4}) {
      if (from & axis) continue;
      // Corner 2 is far, low, left: its three edges are hidden.
      const bool hidden = from == 2 || (from | axis) == 2;
      const Place a = view.of(view.corner(from)), b = view.of(view.corner(from | axis));
      out.line(a.x, a.y, b.x, b.y, {"frame", 1.0, hidden ? "4 4" : ""});
    }
  }
}

/// Direction in the drawing of a signed axis "+x", "-z"; nothing for other words.
std::optional<Place> direction_of(const std::string& word) {
  if (word.size() != 2 || (word[0] != '+' && word[0] != '-')) return {};
  const double sign = word[0] == '+' ? 1.0 : -1.0;
  const double length = std::hypot(slant_x, slant_y);
  switch (word[1]) {
    case 'x':
      return Place{sign, 0.0};
    case 'y':
      return Place{sign * slant_x / length, -sign * slant_y / length};
    case 'z':
      return Place{0.0, -sign};
    default:
      return {};
  }
}

void draw_arrow(SvgWriter& out, const Place& at, const Place& d) {
  const double x = at.x + 34.0 * d.x, y = at.y + 34.0 * d.y;
  out.line(at.x + 6.0 * d.x, at.y + 6.0 * d.y, x, y, {"ink", 1.4});
  out.fill(fmt::format("M{} {}L{} {}L{} {}z", px(x + 6.0 * d.x), px(y + 6.0 * d.y), px(x + 3.5 * d.y),
                       px(y - 3.5 * d.x), px(x - 3.5 * d.y), px(y + 3.5 * d.x)),
           "ink");
}

std::string label_of(const SketchPoint& point) {
  std::string text = point.name;
  if (!point.direction.empty() && !direction_of(point.direction)) text += ", " + point.direction;
  if (!point.remark.empty()) text += ": " + point.remark;
  return text;
}

void draw_sign(SvgWriter& out, const SketchPoint& point, const Place& at) {
  if (point.absorber) {
    out.frame(at.x - 6.0, at.y - 6.0, 12.0, 12.0, {"series-2", 2.0}, "paper");
  } else {
    out.circle(at.x, at.y, 5.0, {"ink", 1.4}, "series-1");
  }
}

}  // namespace

std::string svg(const MachineSketch& sketch) {
  if (sketch.points.empty()) return {};
  SvgWriter out;
  const View view(sketch.points);
  if (view.known()) draw_box(out, view);

  std::vector<Box> taken;
  for (const SketchPoint& point : sketch.points) {
    if (!point.position_m) continue;
    const Place at = view.of(*point.position_m);
    taken.push_back({at.x - 7.0, at.y - 7.0, at.x + 7.0, at.y + 7.0});
    if (const auto d = direction_of(point.direction)) {
      draw_arrow(out, at, *d);
      const Place tip{at.x + 42.0 * d->x, at.y + 42.0 * d->y};
      taken.push_back({std::min(at.x, tip.x) - 4.0, std::min(at.y, tip.y) - 4.0, std::max(at.x, tip.x) + 4.0,
                       std::max(at.y, tip.y) + 4.0});
    }
    draw_sign(out, point, at);
  }
  double foot = view.known() ? view.height() - 20.0 : 10.0;
  std::string names;
  for (const SketchPoint& point : sketch.points) {
    const std::string text = label_of(point);
    names += names.empty() ? text : "; " + text;
    if (point.position_m) {
      const Place at = view.of(*point.position_m);
      const Box box = placed_beside(at.x, at.y, text_width(text, text_size), 16.0,
                                    {4.0, 4.0, page_width - 4.0, view.height()}, taken);
      taken.push_back(box);
      out.patch_text(0.5 * (box.left + box.right), box.bottom - 4.0, text, text_size);
    } else {
      draw_sign(out, point, {20.0, foot + 10.0});
      out.text(34.0, foot + 14.0, text, Anchor::start, text_size);
      foot += 22.0;
    }
  }
  return out.document(page_width, foot + 6.0, sketch.title, names);
}

}  // namespace stillmass::report
