#pragma once

#include <complex>
#include <span>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/modal/half_power.hpp"

namespace stillmass::modal {

/// What the search for modes sees at each line, all responses together.
struct PeakLines {
  double line_hz = 0.0;
  std::vector<double> indicator;  ///< sqrt(sum over responses of the squared imaginary part of the accelerance)
  std::vector<double> u;          ///< its standard uncertainty
  std::vector<double> coherence;  ///< mean over responses; empty: not known (a single hit)
};

/// Where modes stand out, with a first guess of their damping: peaks of the indicator (of which a real mode has one at
/// its natural frequency, whatever lies beside it) that rise above both valleys beside them by a third and by ten
/// standard uncertainties (dips and bumps of noise over a thousand lines differ by six or seven), with a coherence of
/// at least 0.8 in the mean of their lines. By frequency; at most `most` (the most prominent ones).
std::vector<FrequencyAndDamping> find_modes(const PeakLines& lines, base::Interval band_hz, std::size_t most = 20);

}  // namespace stillmass::modal
