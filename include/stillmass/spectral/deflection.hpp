#pragma once

#include <complex>
#include <cstddef>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/estimate.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/block_consumer.hpp"
#include "stillmass/spectral/block_transform.hpp"
#include "stillmass/spectral/spectrum.hpp"

namespace stillmass::spectral {

/// How a point moves against the reference at one frequency.
struct Deflection {
  std::string point;                    ///< the channel's point, or its name where it has none
  std::string channel;                  ///< name
  base::Estimate magnitude;             ///< |point over reference|, both as the same quantity, ratio
  std::optional<base::Estimate> phase;  ///< rad, -pi to pi, e^{+i omega t}: positive where the point leads; absent
                                        ///< where it cannot be known (one roved sensor and no reference)
  std::optional<double> coherence;      ///< absent for a single block

  /// Point over reference; nothing without a phase.
  std::optional<std::complex<double>> ratio() const;
};

/// A point for which no ratio is given, and why.
struct PointRefusal {
  std::string point;
  std::string channel;
  base::Refusal why;
};

/// The shape in which a structure moves at one forcing frequency.
struct DeflectionShape {
  double asked_hz = 0.0;
  base::Estimate frequency;  ///< where the line is, Hz; u: how far it may lie off (its breadth over the recording)
  std::string reference;     ///< point of the reference; it has magnitude 1 and phase 0 among `points`, by
                             ///< definition
  std::vector<Deflection> points;
  std::vector<PointRefusal> not_given;
  bool sign_known = true;      ///< false: magnitudes only
  bool levels_agree = true;    ///< false: taken one after the other without a reference, so that a change of level
                               ///< between the recordings is in the ratios and not in their u
  std::size_t recordings = 1;  ///< joined
  std::vector<std::string> disagreeing;  ///< points that two recordings give more than three u apart
};

struct DeflectionOptions {
  Window window = Window::hann;
  double overlap = 0.5;
  double resolution_hz = 0.0;    ///< line spacing; 0: chosen (block_plan), at most a sixteenth of the lowest frequency
  std::size_t block_frames = 0;  ///< exact block length; 0: from `resolution_hz`
  std::optional<std::size_t> reference{};  ///< channel counted from 0; without it the one that stands out of its own
                                           ///< noise the most, for each frequency anew
  double wander = 5e-4;                    ///< the frequency stays within this share of itself
  double least_coherence = 0.5;            ///< below, half of what is under the peak is not the reference's: not given
};

/// Whether blocks of that length leave room for a deflection at this frequency (Hz): its peak, as far as it wanders,
/// stands clear of the window's lobe about 0 Hz and of the last line. Where not, `DeflectionConsumer` throws.
bool has_room(double frequency_hz, double rate_hz, std::size_t block_frames, const DeflectionOptions& options);

/// Deflections at given frequencies as a consumer. Every channel is transformed once a block; sums of products are held
/// at the lines about the frequencies only, so memory depends on frequencies and channels (64 channels: about 0.3 MB a
/// frequency), not on lines or length. Channels of motion take part; forces, tachos and unknown units are left out.
class DeflectionConsumer final : public BlockConsumer {
 public:
  /// Throws `Error` (usage): no frequency, one outside what lines and rate allow, a wander outside 0 to 0.1, a
  /// reference that is no motion, fewer than two channels of motion, a resolution that the range cannot give.
  DeflectionConsumer(const recording::Recording& recording, recording::FrameRange range,
                     const std::vector<double>& frequencies_hz, const DeflectionOptions& options = {});
  ~DeflectionConsumer() override;

  std::unique_ptr<recording::Consumer> fresh(recording::FrameRange owned) const override;
  void merge(recording::Consumer& next) override;

  /// After the pass: one a frequency, in the order asked for. The ratio is the sum of the cross-spectrum over the lines
  /// about the frequency, over that of the reference's auto-spectrum, both less what the quieter side of the peak shows
  /// of noise. u: from the incoherent power under the peak, for a steady tone in noise, overlap and correlation of
  /// lines counted; absent for a single block. Refused: `no-line` (no channel stands out of its noise there),
  /// `no-valid-block`. A point is not given (`low-coherence`) below `least_coherence` or below what unrelated noise of
  /// as many averages reaches once in a thousand.
  std::vector<base::Answer<DeflectionShape>> shapes() const;

 private:
  struct Setup;
  struct Sums;

  DeflectionConsumer(const DeflectionConsumer& whole, recording::FrameRange owned);
  void take_block(const Block& block) override;

  std::shared_ptr<const Setup> setup_;
  BlockTransform transform_;
  std::unique_ptr<Sums> sums_;
};

/// The same over a whole recording.
std::vector<base::Answer<DeflectionShape>> deflections(const recording::Reader& reader, recording::FrameRange range,
                                                       std::span<const double> frequencies_hz,
                                                       const DeflectionOptions& options, const base::Context& context);

/// The same shape as ratios to its point of the greatest magnitude: what was 1 there is 1 here. u: of both ratios. The
/// coherence of a point with the new reference is taken as the product of both with the old one. A shape without phases
/// is as it was.
DeflectionShape over_the_greatest(DeflectionShape shape);

/// One or more sensors moved from point to point against a reference that stayed: the shapes of the recordings as one.
/// The ratio to the reference is free of a changing level. A point measured more than once is the weighted mean, with
/// the greater of the inner and outer uncertainty. Refused: `references-differ`, `frequencies-differ` (more than
/// `tolerance`, relative, between any two: another speed is another shape; 1 %: common practice). Throws `Error`
/// (usage) for no shape.
base::Answer<DeflectionShape> joined(std::span<const DeflectionShape> recordings, double tolerance = 0.01);

/// The level of one point at the forcing frequency in a recording of its own.
struct RovedLevel {
  std::string point;
  base::Estimate amplitude_rms;  ///< SI, all of one quantity
  base::Estimate frequency;      ///< Hz
};

/// One roved sensor and no reference: magnitudes over the greatest, without phase (`sign_known` false), and true only
/// if the machine ran alike each time (`levels_agree` false). Refused: `frequencies-differ`. Throws `Error` (usage) for
/// fewer than two levels or quantities that differ.
base::Answer<DeflectionShape> magnitudes_only(std::span<const RovedLevel> levels, double tolerance = 0.01);

}  // namespace stillmass::spectral
