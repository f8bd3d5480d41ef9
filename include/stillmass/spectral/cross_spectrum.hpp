#pragma once

#include <complex>
#include <cstddef>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/block_consumer.hpp"
#include "stillmass/spectral/block_transform.hpp"
#include "stillmass/spectral/hit_windows.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// Averaged one-sided cross-spectrum of an output channel against a reference (input) channel with both auto-spectra,
/// all of the same blocks: those in which both channels are valid throughout.
struct CrossSpectrum {
  std::string reference;  ///< channel names
  std::string output;
  base::Quantity reference_quantity = base::Quantity::force;
  base::Quantity output_quantity = base::Quantity::acceleration;
  double rate_hz = 0.0;
  double line_hz = 0.0;
  std::vector<double> reference_density;  ///< Gxx, SI unit squared per Hz
  std::vector<double> output_density;     ///< Gyy
  std::vector<std::complex<double>>
      cross;                     ///< Gxy, mean of conj(X) Y: its phase is that of the output over the reference
  Window window = Window::hann;  ///< rectangle for blocks of hits: densities are then means over the block
  std::size_t blocks = 0;        ///< 0: no block with both valid, and then no lines
  double effective_averages = 0.0;
  std::optional<double> decay_s;  ///< time constant of an exponential window (hit_windows.hpp)

  double frequency(std::size_t k) const { return static_cast<double>(k) * line_hz; }
};

/// Which channels, counted from 0 in the order of the recording.
struct ReferenceAndOutputs {
  std::size_t reference = 0;
  std::vector<std::size_t> outputs;
};

/// The cross-spectra as a consumer, so that they can share a pass with others. One an output.
class CrossSpectrumConsumer final : public BlockConsumer {
 public:
  /// Of stationary signals. Throws `Error` (usage): resolution that the range cannot give, peak hold, a channel that is
  /// not there.
  CrossSpectrumConsumer(const recording::Recording& recording, recording::FrameRange range,
                        ReferenceAndOutputs channels, const SpectrumOptions& options);
  /// Of hits: the reference is the force. The blocks are those of a triggered plan.
  CrossSpectrumConsumer(const recording::Recording& recording, BlockPlan plan, ReferenceAndOutputs channels,
                        const HitWindows& windows);

  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one an output, in the order asked for.
  std::vector<CrossSpectrum> spectra() const;

 private:
  struct Setup {
    double rate_hz = 0.0;
    std::vector<recording::Channel> channels;
    ReferenceAndOutputs which;
    Window window = Window::hann;
    double norm = 1.0;
    std::size_t pre_trigger = 0;
    std::optional<double> decay_s;
  };
  struct Sums {
    std::vector<double> reference, output;
    std::vector<std::complex<double>> cross;
    std::vector<BlockRun> used;
  };

  CrossSpectrumConsumer(const CrossSpectrumConsumer& whole, recording::FrameRange owned);
  void take_block(const Block& block) override;

  std::shared_ptr<const Setup> setup_;
  BlockTransform reference_transform_;
  BlockTransform output_transform_;
  std::vector<Sums> sums_;
};

/// Cross-spectra of stationary signals over the frames of `range`. Match SciPy `csd` (detrend False, scaling density)
/// on the same samples to 1e-10. Throws `Error` (usage) as the consumer.
std::vector<CrossSpectrum> cross_spectra(const recording::Reader& reader, recording::FrameRange range,
                                         const ReferenceAndOutputs& channels, const SpectrumOptions& options,
                                         const base::Context& context);

}  // namespace stillmass::spectral
