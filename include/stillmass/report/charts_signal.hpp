#pragma once

#include <optional>
#include <span>

#include "stillmass/report/chart.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/spectrum.hpp"

namespace stillmass::report {

/// The recording at a glance: least and largest sample against time, one panel a channel (at most eight).
Chart overview_chart(const step::CheckResult& result);

/// One channel: amplitude (in the trade's unit and the result's detector) or density against frequency, with forcing
/// frequencies, peaks and their causes.
Chart spectrum_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel, bool density = false);

/// The zoomed band of a channel; the waveform over a turn with its standard error; the spectrum of its envelope; its
/// third-octave bands. The channel has them.
Chart zoom_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);
Chart waveform_chart(const step::ChannelSpectrum& channel);
Chart envelope_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);
Chart third_octave_chart(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);

/// Broad-band r.m.s. velocity of every channel against the zones and the target, mm/s. `after` may be empty. Nothing
/// where no channel has a velocity.
std::optional<Chart> severity_chart(std::span<const step::ChannelSpectrum* const> before,
                                    std::span<const step::ChannelSpectrum* const> after,
                                    std::optional<double> target_m_s);

/// The same channel before and after the absorber was fitted, r.m.s. velocity against frequency.
Chart before_after_chart(const step::ChannelSpectrum& before, const step::ChannelSpectrum& after, double to_hz);

}  // namespace stillmass::report
