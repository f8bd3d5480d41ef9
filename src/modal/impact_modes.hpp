#pragma once

#include <cstddef>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/modal/curve_fit.hpp"
#include "stillmass/modal/impact_test.hpp"
#include "stillmass/modal/mode.hpp"

#include "modal/hit_spectra.hpp"
#include "modal/mode_search.hpp"

namespace stillmass::modal {

/// What the uncertainty is worked out from.
struct Fitted {
  const HitSpectra& spectra;
  const std::vector<Average>& averages;   ///< in the order of the fit
  const std::vector<std::size_t>& order;  ///< response of each of them
  const FitLines& lines;
  const CurveFit& fit;
};

/// The fitted modes as estimates: jackknife over hits or scatter about the fit, whichever is wider, calibration added
/// to the mass; the half-power bandwidth beside the curve fit; shapes over the responses. Findings go to `test`.
std::vector<Mode> modes_with_uncertainty(const Fitted& fitted, const ImpactTestOptions& options, ImpactTest& test,
                                         const base::Context& context);

}  // namespace stillmass::modal
