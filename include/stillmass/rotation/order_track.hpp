#pragma once

#include <complex>
#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/unit.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/speed_curve.hpp"

namespace stillmass::rotation {

struct OrderOptions {
  std::vector<double> orders = {1.0, 2.0, 3.0};  ///< > 0, up to 100
  std::vector<std::size_t> channels;             ///< positions in `Recording::channels`; empty: all vibration channels
  std::size_t turns_per_block = 8;               ///< order resolution 1 / turns (R7); at least 4
  double overlap = 0.75;                         ///< fraction of a block, 0 to 0.95
};

/// Amplitude and phase of one order against speed. All vectors are of one length, in order of time.
struct OrderTrack {
  double order = 1.0;
  std::string channel;
  base::Quantity quantity = base::Quantity::acceleration;
  std::size_t turns_per_block = 8;
  std::vector<double> time_s;    ///< middle of the block
  std::vector<double> speed_hz;  ///< mean over the middle half of the block
  std::vector<std::optional<double>> sweep_hz_per_s;
  /// r.m.s. amplitude with phase, SI: x(t) = sqrt 2 Re(value e^{+i 2 pi order n}), n turns since a tacho edge. The
  /// angle of `value` is minus the phase lag.
  std::vector<std::complex<double>> value;
  std::vector<double> noise;  ///< r.m.s. amplitude of what lies half way to the neighbouring orders

  double frequency(std::size_t i) const { return order * speed_hz[i]; }
  double amplitude_rms(std::size_t i) const { return std::abs(value[i]); }
  /// Lag from the tacho's edge to the next positive peak, 0 <= lag < 360 degrees of this order. With more than one
  /// pulse per turn, and for orders that are not whole numbers, it counts from the first pulse of the recording.
  double phase_lag_deg(std::size_t i) const;
};

/// Tracks of every order on every channel: the angular samples of blocks of whole turns under a Hann window, their
/// Fourier coefficient at the order. An order whose amplitude and phase against angle stay constant within a block is
/// found exactly, however fast the speed changes; other orders closer than 2 / turns leak in. Blocks with invalid
/// samples, and those whose frequency passes 0.4 of the rate, are left out. Grouped by channel, then order.
std::vector<OrderTrack> order_tracks(const recording::Reader& reader, recording::FrameRange range,
                                     const SpeedCurve& curve, const OrderOptions& options,
                                     const base::Context& context);

/// The track in another of acceleration, velocity, displacement: divided or multiplied by i 2 pi f (quasi-steady: the
/// relative error of the amplitude is of the size sweep / (2 pi f^2)). Throws `Error` (usage) for other quantities.
OrderTrack in_quantity(const OrderTrack& track, base::Quantity quantity);

}  // namespace stillmass::rotation
