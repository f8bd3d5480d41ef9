#pragma once

#include <span>
#include <string>
#include <vector>

#include "stillmass/step/spectrum.hpp"

// What a spectrum says in sentences and rows, for the terminal and for the page.
namespace stillmass::report {

/// The channel of the most blocks: what is said of all of them; null without any.
const spectral::Spectrum* averaged(const step::SpectrumResult& result);

/// "hann window, lines 0.546 Hz apart, 64 blocks worth 60.7 independent ones: why these lines".
std::string blocks_sentence(const step::SpectrumResult& result);
/// "1478.049 +- 0.052 rpm, from 1x, 2x, 6x of 5 channels"; empty where it is not known.
std::string speed_sentence(const step::SpectrumResult& result);
/// "7.50 +- 0.12 mm/s rms from 10 to 1000 Hz"; empty where there is no level.
std::string overall_sentence(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);
/// What the level is held against, one sentence each: zone, typical ranges, the plant's limits, background.
std::vector<std::string> judgements(const step::ChannelSpectrum& channel);
/// "as measured: r.m.s. 1.20 m/s2, peak 3.40 m/s2, crest factor 2.8, kurtosis 1.6".
std::string features_sentence(const step::ChannelSpectrum& channel);
/// Where no rule speaks: the line that moves a channel most, and its share of the level; empty where none stands out.
std::string largest_line_sentence(std::span<const step::ChannelSpectrum* const> channels);
/// The cause with what a finer look or the background says.
std::string cause_text(const step::SpectralPeak& peak);
/// Harmonics and side bands that were found without the speed, one sentence each.
std::vector<std::string> family_sentences(const step::SpectrumResult& result);
/// Band and lines of an envelope, or why there is none.
std::string envelope_sentence(const step::EnvelopeResult& envelope);

/// A table as texts.
struct Rows {
  std::vector<std::string> header;
  std::vector<std::vector<std::string>> rows;
};
Rows peak_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel, bool density);
/// Band and lines of a zoom, and its highest lines.
std::string zoom_sentence(const step::ChannelSpectrum& channel);
Rows zoom_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);
Rows envelope_rows(const step::EnvelopeResult& envelope);
/// Points against frequencies: "1.00 at 0 deg".
Rows deflection_rows(const std::vector<step::OperatingDeflection>& shapes);
/// What to know of those ratios.
std::vector<std::string> deflection_notes(const std::vector<step::OperatingDeflection>& shapes);
Rows synchronous_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);
Rows third_octave_rows(const step::SpectrumResult& result, const step::ChannelSpectrum& channel);

}  // namespace stillmass::report
