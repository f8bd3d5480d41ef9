#pragma once

#include <string>
#include <string_view>
#include <utility>
#include <variant>
#include <vector>

#include "stillmass/report/chart.hpp"
#include "stillmass/report/machine_sketch.hpp"
#include "stillmass/report/spec_sheet.hpp"

namespace stillmass::report {

/// A page as plain data. All text is plain text: it is escaped here, in one place, on its way into HTML.
struct Paragraph {
  std::string text{};
};

struct Bullets {
  std::vector<std::string> items{};
  bool numbered = false;
};

/// Columns whose cells are all numbers (or empty) are set to the right. A row may be shorter than the header.
struct Table {
  std::string caption{};
  std::vector<std::string> header{};
  std::vector<std::vector<std::string>> rows{};
  std::vector<std::string> notes{};  ///< below the table
};

/// A sentence that must not be overlooked, with what to do about it.
struct Caution {
  Tone tone = Tone::caution;
  std::string heading{};  ///< "Channel 2 is clipped"; may be empty
  std::string text{};
};

struct Block;

/// Folded on the screen, open in print.
struct Details {
  std::string summary{};
  std::vector<Block> blocks;
};

struct Block : std::variant<Paragraph, Bullets, Table, Chart, Caution, SpecSheet, MachineSketch, Details> {
  using variant::variant;
};

struct Section {
  std::string heading{};
  std::vector<Block> blocks;
};

/// One of the lines that a practitioner acts on: "Cause" - "Resonance at 24.6 Hz, driven by 1x".
struct Line {
  std::string label{};
  std::string text{};
  Tone tone = Tone::neutral;
};

struct Page {
  std::string title{};     ///< "Cooling water pump 2"
  std::string subtitle{};  ///< "Vibration survey"
  std::vector<std::pair<std::string, std::string>>
      facts{};                ///< small print under the title: date, survey file, version
  std::string verdict{};      ///< the answer in one sentence
  Tone tone = Tone::neutral;  ///< of the verdict box
  std::vector<Line> lines{};  ///< in the verdict box
  std::vector<Section> sections{};
};

/// Text and attribute values for HTML and SVG: & < > " ' escaped; bytes that are not UTF-8 and control characters
/// replaced (`base::printable`), line breaks and tabs kept as blanks.
std::string escaped(std::string_view text);

/// One self-contained document: style, script, chart library and data inside; a Content-Security-Policy that forbids
/// every connection. Charts stand as SVG until the script has drawn them; print shows the SVG. The chart library is
/// put in only if there is a chart. Throws what `check(Chart)` throws.
std::string html(const Page& page);

}  // namespace stillmass::report
