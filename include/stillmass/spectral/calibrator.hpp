#pragma once

#include <cstddef>
#include <numbers>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/frequency_response.hpp"

namespace stillmass::spectral {

/// What a calibrator gives: a tone of known frequency and level. The default is that of common handheld exciters:
/// 1000 rad/s and 10 m/s2 r.m.s., known to 3 % at twice the standard uncertainty (common practice).
struct CalibratorTone {
  double frequency_hz = 1000.0 / (2.0 * std::numbers::pi);
  double rms = 10.0;  ///< SI unit of the quantity; taken to that of the channel at the frequency, where it is another
  base::Quantity quantity = base::Quantity::acceleration;
  double relative_u = 0.015;  ///< standard uncertainty of the level
};

/// A mass hung freely, struck by the hammer and felt by the sensor: its accelerance is 1 / mass.
struct HungMass {
  double kg = 0.0;            ///< with the sensor on it
  double relative_u = 0.001;  ///< standard uncertainty
  double least_hz = 10.0;     ///< the mass swings on its strings below (common practice: ten times that frequency)
};

/// What a calibration recording says of one channel's factor.
struct Calibration {
  std::string channel;
  base::Estimate
      measured;  ///< level (SI, r.m.s.) with the stated factor; on a hung mass: mass times accelerance, ratio
  base::Estimate correction;  ///< multiply the stated factor by it; u: measurement and reference together, relative
  double frequency_hz = 0.0;  ///< of the tone found; on a mass: middle of the band used
  base::Interval band_hz;     ///< on a mass: where the accelerance was level and coherent
  /// Empty: within 10 % of what the channel states. Else what the factor looks like: "9.81: m/s2 and g mixed up", ...
  std::string suspicion;
  bool opposed = false;  ///< on a mass: the response opposes the blow (polarity, or struck from the other side)
};

/// Correction of a channel from a recording of a calibrator: amplitude of the tone near the frequency given, with the
/// uncertainty of the tone (noise, scatter of the blocks) and of the calibrator. Refused (`no-calibrator-tone`): no
/// tone there (a dead sensor, not seated), or a stronger one at another frequency; (`unsteady-tone`): the level wanders
/// by more than 5 %. Throws what the reader throws, `Stopped`, and `Error` (usage).
base::Answer<Calibration> calibrate(const recording::Reader& reader, recording::FrameRange range, std::size_t channel,
                                    const CalibratorTone& tone, const base::Context& context);

/// Correction of the ratio response over force from blows on a hung mass: mass * |H| over the lines from `least_hz` on
/// that the hammer reaches (force spectrum within 20 dB of its maximum), where the coherence is above 0.95 and |H|
/// within 5 % of its median. Accelerations only. `correction` is 1 / (mass |H|): multiply the response's factor, or
/// divide the force's factor, by it. u: scatter over the band, unevenness of |H| and the mass. Refused
/// (`no-level-accelerance`): fewer than 10 lines, less than an octave of them, or less than 70 % of the
/// lines between. Throws `Error` (usage) as
/// `hit_response`, and for a mass that is not positive.
base::Answer<Calibration> calibrate_on_mass(std::span<const HitBlock> hits, double rate_hz, const HungMass& mass,
                                            const HitWindows& windows);

/// What a measured level that is `ratio` times the expected one looks like; empty within 10 % of 1.
/// The list, each within 10 %: dead, 9.80665 and its inverse, sqrt 2 (peak for r.m.s.), 2 sqrt 2 (peak-to-peak), 25.4,
/// 1000.
std::string suspicion_of(double ratio);

}  // namespace stillmass::spectral
