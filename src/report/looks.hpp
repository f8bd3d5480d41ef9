#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/report/chart.hpp"

namespace stillmass::report {

/// How a named thing looks, the same in every panel of a chart.
struct Look {
  std::size_t index = 0;  ///< 0 for the first name; also chooses dash and marker
  std::string role;       ///< of the palette
};

struct LegendEntry {
  std::string name;
  Look look;
  Style style = Style::line;
  bool band = false;
};

/// Names of series and bands in the order in which they appear; a band with the name of a series shares its look.
class Looks {
 public:
  explicit Looks(const Chart& chart);

  Look of(const Series& series) const { return series.quiet ? Look{0, "quiet"} : look_of(series.name); }
  Look of(const Band& band) const { return look_of(band.name); }
  /// What must be explained; empty where there is only one series.
  const std::vector<LegendEntry>& legend() const { return legend_; }

 private:
  Look look_of(const std::string& name) const;

  std::vector<std::string> names_;  ///< of what has a colour of its own
  std::vector<LegendEntry> legend_;
};

/// A word that belongs over the first panel: of a vertical mark or, at its middle, of a vertical zone.
struct TopLabel {
  double x;
  std::string text;
};

/// Only those that the axis has a place for; those out of its present range as well.
std::vector<TopLabel> top_labels(const Chart& chart, base::Interval x_range);

/// Dash pattern of the line with that index in a black and white print; empty: solid.
std::string_view dash(std::size_t index);

}  // namespace stillmass::report
