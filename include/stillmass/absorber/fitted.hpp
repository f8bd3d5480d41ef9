#pragma once

#include <array>
#include <complex>
#include <optional>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/modal/attached.hpp"

namespace stillmass::absorber {

/// What the fitted absorber turns out to be.
struct FittedAbsorber {
  double frequency_hz = 0.0;
  std::optional<double> damping_ratio;
  /// Frequency it should have over frequency it has, minus 1: positive: stiffen (shorten the blade).
  double retune = 0.0;
};

/// From amplitude and phase of the forcing line before and after at the same frequency and load: the ratio x after /
/// x before gives D = (1/ratio - 1)/H and with it the spring k + i w c = D m w^2 / (D + m w^2). `wanted_hz`: the design
/// frequency. Refuses (`too-few-lines` never; `no-change`: the ratio is within 2 % of 1 and says nothing of the
/// absorber; `not-an-absorber`: the stiffness comes out negative, so something else changed).
base::Answer<FittedAbsorber> fitted_from_line(const modal::OneMode& machine, double mass_kg, double f_hz,
                                              std::complex<double> after_over_before, double wanted_hz);

/// From the two split frequencies: fa = f- f+ / f1 (damping neglected). Refuses (`not-split`) where f1 does not lie
/// between the two.
base::Answer<FittedAbsorber> fitted_from_splits(double f1_hz, std::array<double, 2> splits_hz, double wanted_hz);

/// Achieved against predicted, r.m.s. velocities in m/s.
struct Achieved {
  double ratio = 0.0;  ///< after over before
  std::optional<double> predicted_ratio;
  /// (measured - predicted) over their joint standard uncertainty; absent where that is unknown. Beyond +-2: the
  /// prediction does not hold.
  std::optional<double> deviation;
};
Achieved achieved(const base::Estimate& before, const base::Estimate& after,
                  const std::optional<base::Estimate>& predicted);

}  // namespace stillmass::absorber
