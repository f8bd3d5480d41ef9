#pragma once

#include <array>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/estimate.hpp"

namespace stillmass::modal {

/// What one method said.
struct MethodResult {
  std::string name;  ///< "half-power bandwidth", "ring-down", "curve fit", ...
  base::Estimate frequency;
  base::Estimate damping_ratio;
};

/// The mode shape at one point relative to the mode's own point.
struct ShapeRatio {
  std::string point;
  double ratio = 0.0;
  double phase_deg = 0.0;
};

/// A natural frequency with its damping and the mass that moves at a point and direction.
struct Mode {
  base::Estimate frequency;  ///< Hz, |pole| / 2 pi
  base::Estimate damping_ratio;
  std::optional<base::Estimate> modal_mass;  ///< kg, mode shape scaled to 1 at `point`
  std::string point;
  std::string state;                                                                    ///< "stopped" or "running"
  std::array<std::array<double, 3>, 3> correlation{{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}};  ///< of frequency, damping, mass
  std::vector<ShapeRatio> shape;
  std::optional<std::string> masked_by;  ///< a forcing harmonic within one bandwidth
  std::vector<MethodResult> methods;
};

}  // namespace stillmass::modal
