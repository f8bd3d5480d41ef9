#pragma once

#include <optional>
#include <vector>

#include "stillmass/absorber/specification.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/modal/state.hpp"

namespace stillmass::step {

struct AbsorberRequest {
  absorber::Request question;                        ///< its stock is filled in from the program's tables
  std::optional<modal::StoppedShift> stopped_shift;  ///< put on a mode of the stopped machine; absent: taken as it is
};

struct AbsorberResult {
  absorber::Request question;  ///< as it was answered: with the mode for running design
  std::optional<absorber::Specification> specification;
  std::optional<base::Refusal> refusal;
  std::vector<base::Finding> findings;  ///< assumptions and what is not met
};

/// From a mode and its forcing to the specification. Throws `Error` (usage) for values out of range.
AbsorberResult size_absorber(AbsorberRequest request, const base::Context& context);

/// What can be bought: data/tables/materials.toml and stock.toml.
absorber::Stock stock();

}  // namespace stillmass::step
