#pragma once

#include <cstddef>
#include <span>
#include <vector>

namespace stillmass::numeric {

// Frequencies in this file are fractions of the (input) sampling rate, 0 to 0.5. A filter is its taps: odd in number,
// symmetric, so that its delay is exactly (taps - 1) / 2 samples; the decimators take that delay out.

/// Shape parameter beta of the Kaiser window for a stop-band attenuation in dB (Kaiser 1974; from memory, equal to
/// SciPy's `kaiser_beta`).
double kaiser_beta(double attenuation_db);

/// Linear-phase low-pass by a Kaiser window: gain 1 up to `pass`, below -attenuation_db from `stop` on, ripple in the
/// pass band 10^(-attenuation_db/20); gain exactly 1 at frequency 0. The length is Kaiser's estimate: within 1 dB of
/// what is asked for where stop - pass <= 0.1. 0 < pass < stop <= 0.5, attenuation_db > 21; throws `Error` (internal)
/// otherwise.
std::vector<double> kaiser_low_pass(double pass, double stop, double attenuation_db);

/// Half-band low-pass: pass band to `pass` < 0.25, stop band from 0.5 - pass on, as long as it takes to reach the
/// attenuation (and, by symmetry, that ripple). Every second tap is exactly 0 but for the middle one, which is 0.5.
std::vector<double> half_band(double pass, double attenuation_db);

/// Gain of a symmetric filter at a frequency: H(f) = h0 + 2 sum h_k cos(2 pi f k), signed.
double gain(std::span<const double> taps, double frequency);

/// Filters and keeps every `factor`-th sample, as a stream. Output sample n stands at the instant of input sample
/// n * factor: no delay. N input samples give ceil(N / factor) output samples; outside, the input counts as 0, so the
/// first and last half_length() / factor output samples are those of a signal that starts and ends abruptly.
class Decimator {
 public:
  Decimator(std::span<const double> taps, std::size_t factor);
  /// Appends to `out` what the samples so far allow.
  void push(std::span<const double> in, std::vector<double>& out);
  /// The rest; after it only a new Decimator may be used.
  void finish(std::vector<double>& out);
  std::size_t half_length() const { return half_length_; }  ///< input samples
  std::size_t factor() const { return factor_; }

 private:
  struct Pair {
    std::size_t distance;  ///< from the middle tap
    double tap;
  };
  void produce(std::vector<double>& out);

  std::vector<Pair> pairs_;  ///< taps beside the middle that are not 0
  double middle_tap_ = 1.0;
  std::size_t half_length_ = 0;
  std::size_t factor_ = 1;
  std::size_t middle_ = 0;  ///< index in held_ of the next output's instant
  std::size_t received_ = 0;
  std::size_t produced_ = 0;
  std::vector<double> held_;
};

/// What a clean decimation keeps and what it removes, as fractions of the output rate.
struct DecimationOptions {
  double pass = 0.42;  ///< gain 1 within the ripple up to here
  double stop = 0.5;   ///< removed from here on: nothing folds back
  double attenuation_db = 100.0;
};

/// Decimation by a power of two: a pyramid of half-band stages, the last stage with the sharp transition. Alias and
/// ripple each at most 10^(-attenuation_db/20) per stage. Alignment and ends as with `Decimator`.
class PyramidDecimator {
 public:
  /// Throws `Error` (internal) where factor is no power of two.
  explicit PyramidDecimator(std::size_t factor, const DecimationOptions& options = {});
  void push(std::span<const double> in, std::vector<double>& out);
  void finish(std::vector<double>& out);
  /// Input samples over which the ends act.
  std::size_t half_length() const;

 private:
  std::vector<Decimator> stages_;
  std::vector<std::vector<double>> between_;
};

/// A whole signal at once.
std::vector<double> decimated(std::span<const double> signal, std::size_t factor,
                              const DecimationOptions& options = {});

}  // namespace stillmass::numeric
