#pragma once

#include <cstddef>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/pass.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/averages.hpp"
#include "stillmass/spectral/block_consumer.hpp"
#include "stillmass/spectral/block_transform.hpp"
#include "stillmass/spectral/window.hpp"

namespace stillmass::spectral {

/// How the densities |X|^2 of the blocks become one.
/// mean: their mean (r.m.s. averaging). peak_hold: the greatest of each line. exponential: a running mean in which each
/// block weighs 1 - 1/n of the next one, n = `exponential_averages`; the weights are divided by their sum, so the first
/// blocks give no bias. In the long run the newest block weighs 1/n and noise is as smooth as from 2 n - 1 blocks that
/// do not overlap (Spectrum::effective_averages has the true figure). Blocks count, not time: a gap weighs nothing.
enum class Averaging { mean, peak_hold, exponential };
std::string_view name(Averaging averaging);  ///< "mean", "peak-hold", "exponential"
std::optional<Averaging> averaging_named(std::string_view name);

struct SpectrumOptions {
  Window window = Window::hann;
  double overlap = 0.5;        ///< fraction of a block, 0 to 0.95
  double resolution_hz = 0.0;  ///< line spacing asked for; 0: see block_choice.hpp
  Averaging averaging = Averaging::mean;
  double exponential_averages = 16.0;   ///< n of exponential averaging, 1 or more; not used otherwise
  std::size_t block_frames = 0;         ///< exact block length; 0: from what follows, or `resolution_hz`
  std::size_t lines = 0;                ///< so many lines from 0 to `lines_to_hz`; 0: not asked for
  double lines_to_hz = 0.0;             ///< 0: half the rate
  std::optional<double> speed_hz{};     ///< running speed, where known: helps to choose the block
  std::optional<double> separate_hz{};  ///< least distance of forcing frequencies to be told apart, where known
};

/// A lobe that stands out of an integrated (or differentiated) spectrum: taken as a tone that carries the lobe's power.
/// Whoever changes the density of an integrated spectrum clears them.
struct StrongLine {
  double frequency_hz = 0.0;
  double u_hz = 0.0;         ///< of the frequency
  double mean_square = 0.0;  ///< of the measured signal (before integration)
  double relative_u = 0.0;   ///< of the mean square
  double correlation = 0.0;  ///< of mean square and frequency, which one fit gives
  double mismatch = 0.0;     ///< power by which the lobe differs from a tone's, over its power: 0 for a steady tone
};

/// Averaged one-sided auto-spectrum of one channel, as a spectral density.
struct Spectrum {
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  double rate_hz = 0.0;
  double line_hz = 0.0;         ///< spacing of the lines; line k stands at k * line_hz
  std::vector<double> density;  ///< SI unit squared per Hz, one-sided, rate/2 included for even blocks
  Window window = Window::hann;
  Averaging averaging = Averaging::mean;
  double noise_bandwidth_hz = 0.0;  ///< equivalent noise bandwidth of one line (of the finite window)
  std::size_t blocks = 0;           ///< averaged; 0: no valid block, and then no lines
  double effective_averages = 0.0;  ///< independent averages: the relative standard error of a density is 1/sqrt of it
                                    ///< (sqrt 2 times that at 0 and rate/2)
  std::vector<Overlap> overlaps;    ///< of the averaged blocks: how much of one another they hold
  std::vector<double> spread;       ///< relative standard deviation of the single blocks' densities (weighted as they
                                    ///< are): about 1 for Gaussian noise, near 0 for a steady tone; empty for one
                                    ///< block or peak hold
  std::size_t first_line = 0;       ///< lines below it are not given (low limit of an integration) and hold 0
  int integrations = 0;             ///< how often the measured signal was integrated line by line (quantity.hpp)
  std::vector<StrongLine> strong_lines;  ///< found where it was integrated; levels count them at their own frequency

  double frequency(std::size_t k) const { return static_cast<double>(k) * line_hz; }
  /// r.m.s. amplitude of a tone on line k: sqrt(density * noise bandwidth).
  double amplitude_rms(std::size_t k) const;
};

/// The spectra as a consumer, so that they can share a pass with others (hand it to `recording::run_pass` with the same
/// range). One spectrum a channel, of blocks with every sample valid and of one segment.
class SpectrumConsumer final : public BlockConsumer {
 public:
  /// Throws `Error` (usage) as `averaged_spectra`.
  SpectrumConsumer(const recording::Recording& recording, recording::FrameRange range, const SpectrumOptions& options);
  /// Of the blocks of a plan, for instance triggered ones. Throws `Error` (usage): exponential averages below 1.
  SpectrumConsumer(const recording::Recording& recording, BlockPlan plan, Window window,
                   Averaging averaging = Averaging::mean, double exponential_averages = 16.0);

  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one a channel, in the order of the recording's channels.
  std::vector<Spectrum> spectra() const;

 private:
  struct Setup {
    double rate_hz = 0.0;
    std::vector<recording::Channel> channels;
    Window window = Window::hann;
    Averaging averaging = Averaging::mean;
    double decay = 1.0;  ///< from block to block
  };
  struct Sums {
    std::vector<double> power;          ///< weighted sum of |X|^2, or its greatest value
    std::vector<double> power_squared;  ///< of |X|^4, with the same weights
    std::vector<BlockRun> used;
  };

  SpectrumConsumer(const SpectrumConsumer& whole, recording::FrameRange owned);
  void take_block(const Block& block) override;
  Spectrum spectrum(std::size_t channel) const;

  std::shared_ptr<const Setup> setup_;
  BlockTransform transform_;
  std::vector<Sums> sums_;
};

/// Averaged spectra of all channels over the frames of `range`. Blocks never cross a gap. Matches SciPy `welch`
/// (detrend False, scaling density or, with the noise bandwidth, spectrum) on the same samples to 1e-10. Throws `Error`
/// (usage: resolution that the range cannot give).
std::vector<Spectrum> averaged_spectra(const recording::Reader& reader, recording::FrameRange range,
                                       const SpectrumOptions& options, const base::Context& context);

/// The same of samples in memory, without a gap and all valid.
Spectrum averaged_spectrum(std::span<const double> samples, double rate_hz, base::Quantity quantity,
                           const SpectrumOptions& options);

}  // namespace stillmass::spectral
