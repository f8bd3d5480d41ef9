#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace stillmass::numeric {

/// Straight lines through (x, y), x ascending strictly, at least one knot; outside, the value of the end knot.
/// Throws `Error` (internal) where x and y differ in length or are empty.
double linear(std::span<const double> x, std::span<const double> y, double at);

/// Piecewise cubic through (x, y) with a continuous slope that never overshoots: where the data rise, the curve rises.
/// Slopes are the weighted harmonic mean of the neighbouring chords, three-point at the ends (Fritsch & Butland 1984).
/// Outside the knots it goes on straight with the end slope. For a smooth function the error falls with the third power
/// of the spacing.
class MonotoneCubic {
 public:
  MonotoneCubic() = default;
  /// At least two knots, x ascending strictly, all finite; throws `Error` (internal) otherwise.
  MonotoneCubic(std::vector<double> x, std::vector<double> y);

  double value(double at) const;
  double slope(double at) const;
  /// The x at which the curve reaches `value`; the data must ascend strictly. Beyond an end where the slope is 0: the
  /// end knot.
  double inverse(double value) const;

  std::span<const double> x() const { return x_; }
  std::span<const double> y() const { return y_; }

 private:
  std::size_t piece(double at) const;

  std::vector<double> x_;
  std::vector<double> y_;
  std::vector<double> slope_;
};

/// Band-limited interpolation: a sinc under a Kaiser window, which can be stretched so that its cut-off lies below the
/// half rate of the samples. With H zero crossings on each side and a stop band of A dB the transition reaches from
/// (1 - d) to (1 + d) times the cut-off, d = (A - 7.95) / (28.72 H) (Kaiser 1974, from memory).
/// The kernel is tabulated (1024 values a zero crossing, linear between them: errors below -115 dB).
class KaiserSinc {
 public:
  /// Defaults: flat within 2e-5 up to 0.8, below -98 dB from 1.2 times the cut-off.
  explicit KaiserSinc(std::size_t zero_crossings = 16, double stop_db = 100.0);

  /// The signal between samples x[0], x[1], ... at `position` (in samples), free of everything above `bandwidth`
  /// (0 < bandwidth <= 1, cut-off over half rate). Samples outside are taken for 0: whoever wants exact values keeps
  /// `reach(bandwidth)` samples on both sides.
  double at(std::span<const double> x, double position, double bandwidth = 1.0) const;
  /// Samples on each side that a value depends on: zero crossings / bandwidth.
  double reach(double bandwidth) const { return static_cast<double>(zero_crossings_) / bandwidth; }

 private:
  struct Node {
    double value;
    double rise;  ///< to the next node
  };
  std::size_t zero_crossings_;
  std::vector<Node> table_;
};

}  // namespace stillmass::numeric
