#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

/// True for a tone of an averaged spectrum that may be more than one steady tone: its blocks scatter by more than a
/// steady tone in that floor (standard deviation sqrt(2 P - 1) / P of the mean, P the prominence), or its peak is
/// broader than the window's lobe; yet not by as much as random noise does (a resonance under noise is no pair).
bool suspect(const Tone& tone);

/// The band in which to look for what a tone of that spectrum is made of: its peak and the window's lobe on both sides.
base::Interval band_around(const Tone& tone, const Spectrum& spectrum);

/// Where to look.
struct CloseBand {
  std::size_t channel = 0;  ///< index into the recording's channels
  base::Interval band_hz;   ///< within 0 to rate/2; as narrow as a few lines of the averaged spectrum
};

/// What a peak is made of.
enum class Closeness {
  single,      ///< one steady tone explains it down to the noise
  resolved,    ///< two or three steady tones, each known
  unresolved,  ///< more than one tone, closer together than the recording can tell apart
  unsteady,    ///< neither: frequency or amplitude wander
  none,        ///< no tone stands out of the noise, or no gap-free stretch holds enough samples
};
std::string_view name(Closeness closeness);

/// A tone of a cluster.
struct CloseTone {
  base::Estimate frequency;      ///< Hz
  base::Estimate amplitude_rms;  ///< SI unit of the channel's quantity
  /// rad, -pi to pi, of the cosine at the middle of the stretch; absent where the tone wanders.
  std::optional<base::Estimate> phase;
};

/// The tones of one band.
struct ToneCluster {
  std::size_t channel = 0;
  std::string channel_name;
  base::Interval band_hz;
  Closeness closeness = Closeness::none;
  /// Ascending frequency. One of `single`; two or three of `resolved` (the strongest: a fourth is not looked for); of
  /// `unresolved` what one tone fits; of `unsteady` mean frequency (its u the wander) and r.m.s. value.
  std::vector<CloseTone> tones;
  double stretch_s = 0.0;          ///< length of the gap-free stretch that was looked at
  double middle_s = 0.0;           ///< its middle, from the start of the recording
  double least_spacing_hz = 0.0;   ///< 1 / stretch: tones closer than one beat in the stretch are not told apart
  std::optional<double> record_s;  ///< `unresolved`: a length of recording that would part them (two beats)
  /// r.m.s. deviation of the frequency within the stretch: of the one (`unsteady`; a steady drift is found 10 to 15 %
  /// too small), or of the most wandering one (`resolved`; absent where all are steady).
  std::optional<double> wander_hz;
  std::optional<double> variation;  ///< `unsteady`: r.m.s. deviation of the amplitude over its mean
  double noise_density = 0.0;       ///< of the noise beside the tones, SI unit squared per Hz, one-sided
  double evidence = 0.0;  ///< by how much the criterion is lower than that of one steady tone (greater is clearer;
                          ///< > 10 is very strong: Kass & Raftery 1995); 0 for `single`
};

/// Parts tones closer than the lobe of the averaged spectrum's window.
///
/// Each band is mixed down and decimated as in `zoom`, from the longest gap-free stretch in the range without an
/// invalid sample (at most 4096 complex samples), in one pass for all bands. Its Fourier lines within the band are
/// fitted by least squares with one, two and three steady tones (frequency, amplitude, phase each) and a parabola for
/// what tones outside leak in. How many: the Bayesian information criterion for sinusoids, 2 L ln(residual) + 5 m ln L
/// for m tones on L lines. Source: Djuric, IEEE Trans. SP 44 (1996) 1744; Stoica & Selen, IEEE SP Magazine 21 (2004) 36
/// (from memory).
///
/// Tones count as resolved where they are more than 1 / stretch apart (Rayleigh) and their sum explains the peak down
/// to the noise, or leaves at most a tenth of the weakest. A beating pair varies in amplitude and phase alike (as r /
/// sqrt 2 each, for a weak companion of ratio r); a peak whose phase varies by four times as much as its amplitude, or
/// the other way round, is one unsteady tone. Where the lines hold two or three humps apart, the strongest of steady
/// amplitude, and their sum beats once the wander of the strongest is taken off, they are tones that wander: resolved,
/// with the wander as u of their frequencies.
///
/// u: from the residual of the fit. One cluster a band, in their order. Throws `Error` (usage) for a band or channel
/// that is not there, and what the reader throws.
std::vector<ToneCluster> resolve_tones(const recording::Reader& reader, recording::FrameRange range,
                                       std::span<const CloseBand> bands, const base::Context& context);

/// The same of samples in memory, without a gap and all valid.
ToneCluster resolve_tones(std::span<const double> samples, double rate_hz, base::Quantity quantity,
                          base::Interval band_hz);

/// The cluster with amplitudes (and phases) as another quantity. Throws `Error` (usage) for a pair that is not of
/// acceleration, velocity, displacement.
ToneCluster as_quantity(const ToneCluster& cluster, base::Quantity from, base::Quantity to);

}  // namespace stillmass::spectral
