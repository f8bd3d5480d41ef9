#pragma once

#include <complex>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/curve_fit.hpp"
#include "stillmass/modal/hits.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::modal {

struct ImpactTestOptions {
  std::vector<ResponseName> responses;     ///< of HitSearch; empty: nameless accelerations
  std::string driving_point;               ///< point (or channel) that was struck; empty: that of the force channel
  std::string force_point;                 ///< of HitSearch
  std::optional<double> force_factor_u;    ///< of HitSearch
  std::optional<base::Interval> band_hz;   ///< modes are sought here; default: 3 lines up to max_frequency_hz
  std::optional<double> max_frequency_hz;  ///< default: where the force spectrum has fallen by 20 dB
  std::string state = "stopped";
};

/// Options with names and calibration as a search found them.
ImpactTestOptions options_for(const HitSearch& search);

/// One averaged accelerance (H1 over the hits), for pictures.
struct AveragedResponse {
  std::string channel;
  std::string point;
  std::vector<std::complex<double>> accelerance;  ///< (m/s2)/N, line k at k * line_hz
  std::vector<double> coherence;                  ///< empty for a single hit
  std::vector<double> u;                          ///< standard uncertainty of the real (as of the imaginary) part
  std::vector<std::complex<double>> fitted;       ///< the model on the same lines; 0 outside the band
};

struct ImpactTest {
  std::vector<Mode> modes;     ///< by frequency; empty: nothing stood out
  double line_hz = 0.0;        ///< spacing of the lines (padded with zeros)
  double resolution_hz = 0.0;  ///< 1 / block length
  base::Interval band_hz;      ///< that was searched
  double decay_per_s = 0.0;    ///< 1 / tau of the exponential window; 0: none was needed
  std::size_t hits = 0;
  std::optional<std::size_t> driving_point;  ///< index of the response; absent: no modal mass
  std::vector<double> force_spectrum;        ///< N s, mean magnitude over hits
  std::vector<AveragedResponse> responses;
  CurveFit fit;
  std::vector<base::Finding> findings;
};

/// Modes from the blows of an instrumented hammer: averaged accelerances, mode search, curve fit; modal mass where one
/// response is the driving point; uncertainty from the scatter over hits (jackknife) or about the fit, whichever is
/// wider, and from calibration. The half-power bandwidth of what is left when the fit's other modes are taken off
/// stands beside it as a second method. An exponential window is put on both signals where the response has not died
/// away within the block, and its damping taken off exactly. Refuses `no-usable-hit` for no blocks, `no-mode` where no
/// resonance stands out. Throws `Error` (internal) for blocks that do not fit together, and `Stopped`.
base::Answer<ImpactTest> impact_test(std::span<const HitBlocks> hits, const ImpactTestOptions& options,
                                     const base::Context& context);

}  // namespace stillmass::modal
