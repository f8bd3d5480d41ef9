#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

namespace stillmass::report {

/// Where a sensor, a hammer or an absorber sat.
struct SketchPoint {
  std::string name{};
  std::optional<std::array<double, 3>> position_m{};  ///< x, y, z (z up)
  std::string direction{};                            ///< "+x", "horizontal", ...; signed axes are drawn as arrows
  std::string remark{};                               ///< "5.2 mm/s, zone C"; may be empty
  bool absorber = false;                              ///< drawn as a place for an absorber
};

struct MachineSketch {
  std::string title{};
  std::vector<SketchPoint> points{};
};

/// The machine as SVG text: points with known positions in a view from the side (x to the right, z up; y drawn
/// slanted), on a box around them; points without a position listed below it. Empty text for no points.
std::string svg(const MachineSketch& sketch);

}  // namespace stillmass::report
