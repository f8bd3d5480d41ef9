#include "stillmass/modal/state.hpp"

#include "stillmass/base/number.hpp"
#include "stillmass/modal/headline.hpp"

namespace stillmass::modal {
namespace {

/// Adds an independent part to one of the three and lowers its correlations: the covariance stays, the variance grows.
void add(Mode& mode, base::Estimate& estimate, std::size_t place, double u) {
  const double before = estimate.u.value_or(0.0);
  estimate = with_added_u(estimate, u);
  const double share = estimate.u && *estimate.u > 0.0 ? before / *estimate.u : 1.0;
  for (std::size_t other = 0; other < 3; ++other) {
    if (other == place) continue;
    mode.correlation[place][other] *= share;
    mode.correlation[other][place] *= share;
  }
}

}  // namespace

ShiftedMode for_running_design(const Mode& mode, const StoppedShift& shift) {
  ShiftedMode result{mode, {}};
  if (mode.state != "stopped" || (shift.frequency == 0.0 && shift.damping == 0.0)) return result;
  add(result.mode, result.mode.frequency, 0, shift.frequency * mode.frequency.value);
  add(result.mode, result.mode.damping_ratio, 1, shift.damping * mode.damping_ratio.value);
  result.finding =
      base::Finding{base::Code::stopped_shift_assumed,
                    "the mode at " + base::rounded(mode.frequency.value, 4) +
                        " Hz was measured on the stopped machine; running, its frequency is taken to lie within " +
                        base::rounded(100.0 * shift.frequency) + " % and its damping within " +
                        base::rounded(100.0 * shift.damping) + " % (standard uncertainties)",
                    {},
                    {},
                    {},
                    base::Strength::fair,
                    {}};
  return result;
}

}  // namespace stillmass::modal
