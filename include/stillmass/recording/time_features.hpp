#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/pass.hpp"

namespace stillmass::recording {

/// The time signal of one channel in a few numbers, over its valid samples. Numbers that they do not support are
/// absent.
struct ChannelFeatures {
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  std::int64_t samples = 0;
  std::optional<double> mean;          ///< SI
  std::optional<double> rms;           ///< about zero, SI
  std::optional<double> deviation;     ///< r.m.s. about the mean, SI (divided by the number of samples)
  std::optional<double> peak;          ///< greatest distance from the mean, SI
  std::optional<double> crest_factor;  ///< peak over deviation; sine: sqrt 2; absent where nothing varies
  std::optional<double>
      kurtosis;  ///< m4 / m2^2 about the mean: Gaussian noise 3, sine 1.5; absent where nothing varies
  std::optional<std::int64_t> at_full_scale;  ///< samples at the end of the recorder's range (within 1.5 of its steps);
                                              ///< absent where the file does not say where that is
  std::int64_t flat_top = 0;                  ///< most samples in a row at the greatest or at the least value

  /// Three samples in a row at an extreme value, or one at full scale: peak, crest factor and kurtosis are then too low
  /// (common practice, the limit of sample_quality.hpp).
  bool is_cut() const { return flat_top >= 3 || at_full_scale.value_or(0) > 0; }
};

/// The features as a cheap consumer, so that they can share the pass of the spectra. Moments are taken of
/// 1024 samples at a time about one of them and merged (Chan, Golub & LeVeque 1983; Pebay 2008; from memory), so an
/// offset of a million times the signal costs no more digits than it costs the samples. However the pass is cut the
/// counts are the same and the other numbers agree to rounding; the number of threads changes no bit.
class TimeFeatures final : public Consumer {
 public:
  /// The recording must outlive the consumer.
  explicit TimeFeatures(const Recording& recording);
  ~TimeFeatures() override;

  std::unique_ptr<Consumer> fresh(FrameRange owned) const override;
  void take(const Chunk& chunk) override;
  void merge(Consumer& next) override;
  /// One entry a channel, in order.
  std::vector<ChannelFeatures> result() const;

 private:
  struct State;
  std::unique_ptr<State> state_;
};

/// The features over the frames of `range`, in a pass of their own.
std::vector<ChannelFeatures> time_features(const Reader& reader, FrameRange range, const base::Context& context);

}  // namespace stillmass::recording
