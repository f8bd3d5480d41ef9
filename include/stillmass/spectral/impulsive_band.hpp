#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/block_consumer.hpp"
#include "stillmass/spectral/block_transform.hpp"

namespace stillmass::spectral {

/// Where and how a band is looked for.
struct BandSearchOptions {
  double lowest_hz = 1000.0;      ///< tones of the machine lie below (common practice)
  double highest_hz = 0.0;        ///< 0: rate / 2.56, where the filters of recorders begin (common practice)
  double least_width_hz = 500.0;  ///< narrower, and the ringing of one blow outlasts the time to the next
  double stretch_s = 2.0;         ///< kurtosis is taken over stretches so long, their median counts
  double searched_s = 30.0;       ///< of a longer recording so much is looked at, spread evenly
  double false_chance = 1e-3;     ///< that any band of Gaussian noise of the same spectrum is called impulsive
};

/// How impulsive the signal in one band is. Spectral kurtosis of the complex envelope x, mean |x|^4 / (mean |x|^2)^2 -
/// 2: 0 for Gaussian noise, -1 for a steady tone, greater than 0 for repeated blows. Source: Antoni, Mech. Syst. Signal
/// Process. 20 (2006) 282.
struct BandKurtosis {
  base::Interval band_hz;
  double kurtosis = 0.0;        ///< lower median over the stretches: one thump does not lift it
  double strongest = 0.0;       ///< greatest of a single stretch
  double strongest_at_s = 0.0;  ///< middle of that stretch, from the start of the recording
  double limit = 0.0;  ///< what Gaussian noise of the same spectrum and length exceeds with the chance of the search
                       ///< shared among its bands
};

/// All bands of one channel: the range cut into 1, 2, 3, 4, 6, 8, 12, ... equal ones (the tree of 1/2 and 1/3 of
/// Antoni, Mech. Syst. Signal Process. 21 (2007) 108), widest first, ascending within a width.
struct BandSearch {
  std::string channel;
  double rate_hz = 0.0;
  BandSearchOptions options;
  double stretch_s = 0.0;             ///< used
  std::size_t stretches = 0;          ///< with valid samples; fewer than 3: nothing is chosen
  std::vector<BandKurtosis> bands;    ///< empty: the rate leaves no range
  std::optional<std::size_t> chosen;  ///< greatest kurtosis among those above their limit
};

/// The band chosen. Refused: `rate-too-low` (less than an octave between lowest and highest, or less than
/// the least width), `recording-too-short`
/// (fewer than three stretches of half a second), `no-impulsive-band` (says where a single thump was, if one stretch
/// alone stands out).
base::Answer<BandKurtosis> chosen_band(const BandSearch& search);

/// The search as a consumer. Memory does not depend on the length of the recording: at most 64 stretches are kept.
/// Blocks with an invalid sample of a channel do not count for it; none crosses a gap.
class BandSearchConsumer final : public BlockConsumer {
 public:
  /// Of those channels (counted from 0). Throws `Error` (usage): a channel that is not there, options that are not
  /// positive.
  BandSearchConsumer(const recording::Recording& recording, recording::FrameRange range,
                     std::vector<std::size_t> channels, const BandSearchOptions& options = {});
  ~BandSearchConsumer() override;

  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one a channel, in the order asked for.
  std::vector<BandSearch> searches() const;

 private:
  struct Setup;
  struct Workspace;
  struct Sums;

  BandSearchConsumer(const BandSearchConsumer& whole, recording::FrameRange owned);
  void take_block(const Block& block) override;

  std::shared_ptr<const Setup> setup_;
  std::unique_ptr<Workspace> workspace_;  ///< of partials only
  std::vector<Sums> sums_;
};

}  // namespace stillmass::spectral
