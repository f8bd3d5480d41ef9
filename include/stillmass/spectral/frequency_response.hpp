#pragma once

#include <complex>
#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/cross_spectrum.hpp"

namespace stillmass::spectral {

/// Output over input per line, time factor e^{+i omega t}: a response that lags has a negative phase.
/// Vectors have one value a line; line k stands at k * line_hz.
struct FrequencyResponse {
  std::string input;  ///< channel names
  std::string output;
  base::Quantity input_quantity = base::Quantity::force;
  base::Quantity output_quantity = base::Quantity::acceleration;
  double line_hz = 0.0;
  std::vector<std::complex<double>> h1;  ///< Gxy / Gxx: right where the noise is in the output; 0 where Gxx is 0
  std::vector<std::complex<double>> h2;  ///< Gyy / Gyx: right where the noise is in the input; 0 where Gxy is 0
  std::vector<double> coherence;         ///< |Gxy|^2 / (Gxx Gyy), 0 to 1; empty for a single block (it would be 1)
  std::vector<double> random_error;      ///< of h1: relative standard error of the magnitude and standard error of the
                                         ///< phase in rad (random_error.hpp); infinite where the coherence is 0; empty
                                         ///< for a single block
  std::size_t blocks = 0;                ///< 0: no usable block, and then no lines
  double averages = 0.0;                 ///< effective
  Window window = Window::hann;          ///< leakage: a resonance narrower than 8 lines is too low (peak_bias)
  std::optional<double> decay_s;  ///< exponential window: every pole decays faster by 1/decay_s (hit_windows.hpp)

  double frequency(std::size_t k) const { return static_cast<double>(k) * line_hz; }
};

FrequencyResponse frequency_response(const CrossSpectrum& spectra);

/// From stationary excitation, one an output. Throws `Error` (usage): as `cross_spectra`.
std::vector<FrequencyResponse> frequency_responses(const recording::Reader& reader, recording::FrameRange range,
                                                   const ReferenceAndOutputs& channels, const SpectrumOptions& options,
                                                   const base::Context& context);

/// From hammer blows in a recording, one an output; the reference channel is the force. Each block has `block_frames`
/// frames and starts at one of `starts` (ascending; `windows.pre_trigger` frames before the blow); one that leaves its
/// segment is left out. Throws `Error` (usage): a channel that is not there, faulty windows.
std::vector<FrequencyResponse> hit_responses(const recording::Reader& reader, std::span<const std::int64_t> starts,
                                             std::size_t block_frames, const ReferenceAndOutputs& channels,
                                             const HitWindows& windows, const base::Context& context);

/// One blow, cut out: force (N) and response (SI), of the same length.
struct HitBlock {
  std::span<const double> force;
  std::span<const double> response;
};

/// The same from blocks in memory, all of one length. Throws `Error` (usage): no block, lengths that differ.
FrequencyResponse hit_response(std::span<const HitBlock> hits, double rate_hz, base::Quantity response_quantity,
                               const HitWindows& windows);

}  // namespace stillmass::spectral
