#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/machine/description.hpp"
#include "stillmass/machine/verdict.hpp"

namespace stillmass::step {

/// A measuring point as severity needs it.
struct SitePoint {
  std::string name;
  std::string direction;
  bool on_bearing_housing = false;
};

/// What is known of the site beyond the samples. Everything may be absent; then the answers that need it are refused.
struct Site {
  std::optional<machine::Machine> machine;
  std::vector<SitePoint> points;
  std::string standard;  ///< severity; empty: by the kind of machine
  std::string category;
  machine::PlantLimits plant;  ///< the plant's own

  const SitePoint* point(std::string_view name) const;
};

}  // namespace stillmass::step
