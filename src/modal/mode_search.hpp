#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/curve_fit.hpp"
#include "stillmass/modal/peaks.hpp"

#include "modal/hit_spectra.hpp"

namespace stillmass::modal {

/// The lines that are fitted: independent ones of all responses, the driving point first where there is one.
struct FitLines {
  std::vector<double> frequency_hz;
  std::vector<std::vector<std::complex<double>>> accelerance;  ///< [response][line]
  std::vector<std::vector<double>> u;
  double decay_per_s = 0.0;

  std::vector<MeasuredResponse> measured() const;
};

/// Lines within the band. An error of the model of 0.2 % of the accelerance counts beside the scatter, so that a
/// quiet recording does not make single lines count for everything.
FitLines fit_lines(const HitSpectra& spectra, std::span<const Average> averages, base::Interval band_hz);
/// The same lines of other accelerances (without one hit), with the uncertainties of the first.
FitLines with_accelerances(FitLines lines, const HitSpectra& spectra,
                           std::span<const std::vector<std::complex<double>>> accelerances);

/// Everything of the responses in which modes are sought.
PeakLines peak_lines(const HitSpectra& spectra, std::span<const Average> averages);

/// At a driving point all modes move with the force, +1, or, with a sensor turned round, all against it, -1: what the
/// modes of the first response do in the main, weighed by the height of their peaks.
double driving_sign(const CurveFit& fit);

/// Fits the modes that stand out, leaves out those the fit does not support (strength under six times its uncertainty,
/// no damping, outside the band), and adds up to three that only show as a misfit (at a driving point only such as move
/// with the others). Refusal: that of the fit.
base::Answer<CurveFit> search_modes(const FitLines& lines, std::vector<FrequencyAndDamping> start,
                                    base::Interval band_hz, bool driving_point_first);

}  // namespace stillmass::modal
