#pragma once

#include <optional>

#include "stillmass/step/spectrum.hpp"

// Levels of a channel and what they are held against: parts of step/spectrum.
namespace stillmass::step {

/// The band in which severity is judged before the standard is known: 10 to 1000 Hz, from 2 Hz for speeds up to
/// 600 r/min (ISO 10816-1 and its parts, from memory).
base::Interval standard_band(const Site& site);

/// The spectrum in another quantity of motion, from where its low-frequency slope ends; other quantities as they are.
spectral::Spectrum in_quantity(const spectral::Spectrum& measured, base::Quantity wanted);

/// A level with the uncertainty of the sensor's calibration in its own, where one was made.
base::Estimate with_calibration(base::Estimate level, const recording::Channel& channel);

/// The part of a band that the spectrum holds; nothing where they do not meet.
std::optional<base::Interval> held(const spectral::Spectrum& spectrum, base::Interval band_hz);

/// The r.m.s. level in that part.
std::optional<base::Estimate> level(const spectral::Spectrum& spectrum, base::Interval band_hz);

/// Fills what the channel's velocity is held against: severity, typical ranges, the plant's limits. `forcing_1x`: the
/// main forcing frequency for the support class, where it is known.
void judge_channel(ChannelSpectrum& channel, const SpectrumRequest& request,
                   const std::optional<base::Estimate>& forcing_1x);

}  // namespace stillmass::step
