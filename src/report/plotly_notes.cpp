#include <algorithm>
#include <cmath>

#include <fmt/format.h>

#include "report/plotly_parts.hpp"
#include "report/ruler.hpp"
#include "report/svg_labels.hpp"
#include "report/svg_writer.hpp"

namespace stillmass::report {

namespace {

constexpr double usual_width = 820.0;  ///< of a panel on a laptop, in CSS pixels: places are chosen for it
constexpr double around_panels = 60.0;
constexpr double small_text = 11.0, text_height = 16.0;

/// A word beside a line or a zone: its anchor on the axis of y, and where it goes from there.
struct Note {
  std::string text;
  double x;   ///< in parts of the panel's width
  double y;   ///< on the axis
  double up;  ///< moved up by so many pixels
  const char* x_anchor;
};

void write_note(JsonText& json, const Note& note, std::size_t index) {
  json.open('{').key("text").text(plain(note.text)).key("xref").text("x domain").key("x").number(note.x);
  json.key("yref").text(axis_name(index)).key("y").number(note.y).key("yshift").number(note.up);
  json.key("xanchor").text(note.x_anchor).key("yanchor").text("middle").key("showarrow").boolean(false);
  json.key("bgcolor").text(colour("paper", 0.75)).key("borderpad").number(1);
  write_font(json, small_text, "ink");
  json.close('}');
}

/// Places the words of one panel so that they keep clear of each other at the usual size.
class Notes {
 public:
  Notes(JsonText& json, const Chart& chart, std::size_t index)
      : json_(json),
        chart_(chart),
        panel_(chart.panels[index]),
        index_(index),
        height_((screen_height(chart) - around_panels) * share_of_height(chart, index)),
        x_(chart.x.scale, *chart.x.range, 0.0, usual_width),
        y_(panel_.y.scale, *panel_.y.range, height_, 0.0) {}

  void write() {
    for (const Mark& mark : panel_.marks) {
      if (mark.direction == Direction::horizontal && !mark.label.empty() && y_.has(mark.at)) write_mark(mark);
    }
    write_zones();
    for (const Callout& callout : panel_.callouts) {
      if (x_.shows(callout.x) && y_.shows(callout.y)) write_callout(callout);
    }
  }

 private:
  /// On its line at the right end, or further left where another word stands already.
  void write_mark(const Mark& mark) {
    const double width = text_width(mark.label, small_text) + 6.0;
    const double foot = y_(mark.at) - 2.0;
    Box box{usual_width - 4.0 - width, foot - text_height, usual_width - 4.0, foot};
    for (const Box& other : taken_) {
      if (box.overlaps(other) && other.left - 4.0 > width)
        box = {other.left - 4.0 - width, box.top, other.left - 4.0, box.bottom};
    }
    taken_.push_back(box);
    write_note(json_,
               {mark.label, box.right / usual_width, on_axis(panel_.y, mark.at), 0.5 * text_height + 2.0, "right"},
               index_);
  }

  /// In the margin to the right, pushed apart where zones are thin.
  void write_zones() {
    std::vector<Note> notes;
    std::vector<double> wanted;
    for (const Zone& zone : panel_.zones) {
      const double from = std::max(zone.from.value_or(y_.range().lo), y_.range().lo);
      const double to = std::min(zone.to.value_or(y_.range().hi), y_.range().hi);
      if (zone.direction != Direction::horizontal || zone.label.empty() || from >= to) continue;
      notes.push_back({zone.label, 1.004, 0.5 * (on_axis(panel_.y, from) + on_axis(panel_.y, to)), 0.0, "left"});
      wanted.push_back(0.5 * (y_(from) + y_(to)));
    }
    const std::vector<double> places = spread(wanted, text_height, 4.0, height_ - 4.0);
    for (std::size_t i = 0; i < notes.size(); ++i) {
      notes[i].up = wanted[i] - places[i];
      write_note(json_, notes[i], index_);
    }
  }

  void write_callout(const Callout& callout) {
    const double x = x_(callout.x), y = y_(callout.y);
    const double width = text_width(callout.text, small_text + 1.0) + 4.0;
    const Box box = placed_beside(x, y, width, text_height, {0.0, 0.0, usual_width, height_}, taken_);
    taken_.push_back(box);
    json_.open('{').key("text").text(plain(callout.text)).key("xref").text("x").key("yref").text(axis_name(index_));
    json_.key("x").number(on_axis(chart_.x, callout.x)).key("y").number(on_axis(panel_.y, callout.y));
    json_.key("ax").number(0.5 * (box.left + box.right) - x);
    json_.key("ay").number(0.5 * (box.top + box.bottom) - y);
    json_.key("showarrow").boolean(true).key("arrowhead").number(0).key("arrowwidth").number(1);
    json_.key("arrowcolor").text(colour("frame")).key("bgcolor").text(colour("paper", 0.8));
    write_font(json_, small_text + 1.0, "ink");
    json_.close('}');
  }

  JsonText& json_;
  const Chart& chart_;
  const Panel& panel_;
  std::size_t index_;
  double height_;
  Ruler x_, y_;
  std::vector<Box> taken_;
};

}  // namespace

void write_notes(JsonText& json, const Chart& chart) {
  for (std::size_t i = 0; i < chart.panels.size(); ++i) Notes(json, chart, i).write();
}

double right_margin(const Chart& chart) {
  double widest = 0.0;
  for (const Panel& panel : chart.panels) {
    for (const Zone& zone : panel.zones) {
      if (zone.direction == Direction::horizontal) widest = std::max(widest, text_width(zone.label, small_text));
    }
  }
  return std::max(14.0, std::min(widest + 10.0, 150.0));
}

}  // namespace stillmass::report
