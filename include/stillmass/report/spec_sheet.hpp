#pragma once

#include <optional>
#include <string>
#include <vector>

namespace stillmass::report {

/// One line of a specification: what, how much, how exactly.
struct SpecRow {
  std::string item{};       ///< "Mass at the tip"
  std::string value{};      ///< "8.40 kg"
  std::string tolerance{};  ///< "+-0.05 kg"; may be empty
  std::string note{};       ///< how to check it; may be empty
};

/// A blade spring with a mass at its free end, as the workshop sees it. Lengths in m; what is absent is drawn as a
/// letter.
struct BladeDrawing {
  std::optional<double> free_length_m{};  ///< from the clamp's edge to the middle of the mass
  std::optional<double> width_m{};
  std::optional<double> thickness_m{};
  std::optional<double> tip_mass_kg{};
  std::optional<double> adjust_m{};  ///< the mass can be moved by this much either way
  std::optional<double> travel_m{};  ///< peak, relative to the machine: the free space needed either way
  int blades = 1;
  std::string direction{};  ///< of the motion: "horizontal, +x"; may be empty
  std::string material{};
  std::string damper{};  ///< "silicone dashpot, 38 N s/m"; empty: no damper drawn
};

/// A sheet that a workshop can build from and a fitter can tune by.
struct SpecSheet {
  std::string title{};    ///< "Absorber at pump-de-h, horizontal"
  std::string purpose{};  ///< one sentence
  std::vector<SpecRow> rows{};
  std::optional<BladeDrawing> drawing{};
  std::vector<std::string> steps{};  ///< tuning on the bench and on the machine, in order
  std::vector<std::string> notes{};  ///< cautions for the fitter
};

/// The drawing as SVG text: side view with clamp, blade, mass, dimension lines, free space, and the blade's section.
/// Not to scale (it says so); the numbers count.
std::string svg(const BladeDrawing& drawing);

/// The sheet as a piece of HTML: table, drawing, steps, notes.
std::string html(const SpecSheet& sheet);

}  // namespace stillmass::report
