#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/pass.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/averages.hpp"
#include "stillmass/spectral/window.hpp"

namespace stillmass::spectral {

/// A band of the spectrum with lines as fine as the recording's length allows, whatever the block length of the
/// averaged spectrum.
struct ZoomOptions {
  base::Interval band_hz;             ///< 0 <= lo < hi <= rate/2
  double resolution_hz = 0.0;         ///< line spacing asked for; 0: as fine as the longest gap-free stretch allows
  std::size_t most_points = 1 << 16;  ///< complex samples in a block at most: bounds the memory of one channel
  Window window = Window::hann;
  double overlap = 0.5;                 ///< fraction of a block, 0 to 0.95
  std::vector<std::size_t> channels{};  ///< indices into the recording's channels; empty: all
};

/// Averaged one-sided auto-spectrum of one channel over a band, as a spectral density: `Spectrum` with lines that do
/// not start at 0 Hz.
struct ZoomSpectrum {
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  base::Interval band_hz;         ///< as asked for; the lines lie within it
  double line_hz = 0.0;           ///< spacing of the lines
  std::int64_t first_number = 0;  ///< line k stands at (first_number + k) * line_hz
  std::vector<double> density;    ///< SI unit squared per Hz, one-sided; within 0.05 % over the band
  Window window = Window::hann;
  double noise_bandwidth_hz = 0.0;  ///< equivalent noise bandwidth of one line
  double block_s = 0.0;             ///< 1 / line_hz
  std::size_t blocks = 0;           ///< averaged; 0: no block with every sample valid, and then no lines
  double effective_averages = 0.0;  ///< as of `Spectrum`
  std::vector<double> spread;       ///< as of `Spectrum`; empty for one block

  double frequency(std::size_t k) const {
    return static_cast<double>(first_number + static_cast<std::int64_t>(k)) * line_hz;
  }
  /// r.m.s. amplitude of a tone on line k: sqrt(density * noise bandwidth).
  double amplitude_rms(std::size_t k) const;
};

/// The zoom as a consumer, so that several bands share one pass (hand it to `recording::run_pass` with the same range).
///
/// The samples are mixed to the middle of the band, low-passed (Kaiser, 100 dB, gain 1 within 1e-5 over the band),
/// decimated, and blocks of the complex samples are windowed, transformed and averaged. Memory: one block a channel,
/// whatever the length of the recording. Half the filter's length (about 1 % of a block, at most) is lost at each end
/// of a stretch. Blocks do not cross gaps; a block with an invalid sample is left out for that channel.
/// Source: Lyons, Understanding Digital Signal Processing, "zoom FFT" (from memory); checked against a DFT of all
/// samples.
class ZoomConsumer final : public recording::Consumer {
 public:
  /// Throws `Error` (usage): a band that is not within 0 to rate/2, a resolution that the range or `most_points` cannot
  /// give (the text says the finest that they can), a channel that is not there.
  ZoomConsumer(const recording::Recording& recording, recording::FrameRange range, const ZoomOptions& options);
  ~ZoomConsumer() override;

  std::int64_t lookahead() const override;
  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void take(const recording::Chunk& chunk) override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one a chosen channel, in the order of `channels`.
  std::vector<ZoomSpectrum> spectra() const;

 private:
  struct Parts;
  explicit ZoomConsumer(std::unique_ptr<Parts> parts);
  std::unique_ptr<Parts> parts_;
};

/// One band, in a pass of its own. Throws as `ZoomConsumer`, and what the reader throws.
std::vector<ZoomSpectrum> zoom(const recording::Reader& reader, recording::FrameRange range, const ZoomOptions& options,
                               const base::Context& context);

/// The zoom as another quantity: density times (2 pi f)^-2n; a line at 0 Hz becomes 0. Throws `Error` (usage) for a
/// pair that is not of acceleration, velocity, displacement.
ZoomSpectrum as_quantity(const ZoomSpectrum& zoom, base::Quantity to);

}  // namespace stillmass::spectral
