#pragma once

#include <cstddef>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/block_consumer.hpp"
#include "stillmass/spectral/impulsive_band.hpp"
#include "stillmass/spectral/spectrum.hpp"
#include "stillmass/spectral/tone.hpp"

namespace stillmass::spectral {

struct EnvelopeOptions {
  SpectrumOptions spectrum{};               ///< window, overlap and lines of the envelope spectrum; averaging: mean
  double highest_hz = 1000.0;               ///< of the envelope spectrum; no more than the width of the band
  std::optional<base::Interval> band_hz{};  ///< without it the most impulsive band of each channel is taken
  BandSearchOptions search{};
};

/// The envelope of what a channel does in a band, |x + i Hilbert(x)|, and its averaged spectrum. It is the plain
/// envelope, not its square: it has the unit of the signal, a line over its mean is the modulation depth, and a few
/// strong blows outweigh the others less.
struct Envelope {
  std::string channel;
  base::Interval band_hz;              ///< between the half-amplitude points of the filter
  std::optional<BandKurtosis> choice;  ///< where the program chose the band
  Spectrum spectrum;                   ///< of the envelope less the mean of each block; the quantity is the channel's;
                                       ///< rate_hz is twice the highest frequency given
  base::Estimate mean;                 ///< of the envelope, SI unit; u from the scatter of the blocks
  double kurtosis = 0.0;               ///< of the complex envelope over all blocks, noise 0 (impulsive_band.hpp)
};

/// Modulation depth of a line of the envelope: its peak amplitude over the mean envelope, ratio. 1: the vibration in
/// the band dies down wholly between two maxima; blows that die down before the next give up to 2. Noise in the band
/// lifts the mean, so the depth of what is modulated is not less than this.
base::Estimate modulation_depth(const Envelope& envelope, const Tone& line);

/// A channel (counted from 0) with the band in which its envelope is taken.
struct EnvelopeBand {
  std::size_t channel = 0;
  base::Interval band_hz;
};

/// Envelope spectra as a consumer. Each block is transformed and the lines of the band alone are transformed back, at
/// twice the rate that holds the square of the envelope: the complex envelope. The filter is flat in the band with
/// raised-cosine flanks about its edges, an eighth of its width each. The ends of a block, where the circular filter
/// mixes one with the other, are taken out by the window; a rectangle keeps them.
class EnvelopeConsumer final : public BlockConsumer {
 public:
  /// Throws `Error` (usage): a highest frequency that is not positive, a band that does not lie within 0 to rate/2 or
  /// is narrower than eight lines, peak hold, a channel that is not there, a resolution that the range cannot give.
  EnvelopeConsumer(const recording::Recording& recording, recording::FrameRange range,
                   const std::vector<EnvelopeBand>& bands, const EnvelopeOptions& options = {});
  ~EnvelopeConsumer() override;

  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one a band, in the order asked for; without a valid block the spectrum has no lines.
  std::vector<Envelope> envelopes() const;

 private:
  struct Setup;
  struct Workspace;
  struct Sums;

  EnvelopeConsumer(const EnvelopeConsumer& whole, recording::FrameRange owned);
  void take_block(const Block& block) override;

  std::shared_ptr<const Setup> setup_;
  std::unique_ptr<Workspace> workspace_;  ///< of partials only
  std::vector<Sums> sums_;
};

/// Of one channel: the envelope, or why there is none.
struct ChannelEnvelope {
  std::string channel;
  std::optional<BandSearch> search;  ///< where the program looked for the band
  base::Answer<Envelope> envelope;
};

/// Envelopes of those channels (counted from 0) over the frames of `range`, in the band of the options or the one that
/// the search chooses (two passes then). Refused per channel as `chosen_band`, and `no-valid-block`. Throws what the
/// reader throws, `Stopped`, and `Error` (usage) as the consumers.
std::vector<ChannelEnvelope> envelopes(const recording::Reader& reader, recording::FrameRange range,
                                       std::span<const std::size_t> channels, const EnvelopeOptions& options,
                                       const base::Context& context);

}  // namespace stillmass::spectral
