#include "stillmass/numeric/fir.hpp"

#include <algorithm>
#include <bit>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"

namespace stillmass::numeric {
namespace {

constexpr double pi = std::numbers::pi;

[[noreturn]] void refuse(const char* what) { throw base::Error(base::ErrorKind::internal, "filter design", what); }

// Modified Bessel function of the first kind, order 0: sum of ((x/2)^k / k!)^2.
double bessel_i0(double x) {
  const double square = 0.25 * x * x;
  double term = 1.0;
  double sum = 1.0;
  for (int k = 1; term > 1e-17 * sum; ++k) {
    term *= square / (static_cast<double>(k) * k);
    sum += term;
  }
  return sum;
}

// Half length from Kaiser's estimate: taps - 1 = (A - 7.95) / (2.285 * 2 pi * transition).
std::size_t half_length_for(double transition, double attenuation_db) {
  return static_cast<std::size_t>(std::ceil(0.5 * (attenuation_db - 7.95) / (2.285 * 2.0 * pi * transition)));
}

void check(double pass, double stop, double attenuation_db) {
  if (!(pass > 0.0 && pass < stop && stop <= 0.5)) refuse("pass and stop band must lie in this order within 0 to 0.5");
  if (!(attenuation_db > 21.0)) refuse("the attenuation must be above 21 dB");
}

// The windowed sinc of that half length, its cut-off in the middle of the transition; not yet scaled.
std::vector<double> windowed_sinc(double cutoff, std::size_t half, double attenuation_db) {
  const double beta = kaiser_beta(attenuation_db);
  const double middle = static_cast<double>(half);
  std::vector<double> taps(2 * half + 1);
  for (std::size_t i = 0; i < taps.size(); ++i) {
    const double k = static_cast<double>(i) - middle;
    const double u = half == 0 ? 0.0 : k / middle;
    const double window = bessel_i0(beta * std::sqrt(std::max(0.0, 1.0 - u * u))) / bessel_i0(beta);
    taps[i] = window * (k == 0.0 ? 2.0 * cutoff : std::sin(2.0 * pi * cutoff * k) / (pi * k));
  }
  return taps;
}

std::vector<double> half_band_of_length(std::size_t half, double attenuation_db) {
  auto taps = windowed_sinc(0.25, half, attenuation_db);
  double beside = 0.0;
  for (std::size_t k = 1; k <= half; k += 2) beside += 2.0 * taps[half + k];
  taps[half] = 0.5;
  for (std::size_t k = 1; k <= half; ++k) {
    const double tap = k % 2 == 0 ? 0.0 : taps[half + k] * 0.5 / beside;
    taps[half + k] = taps[half - k] = tap;
  }
  return taps;
}

double largest_gain(std::span<const double> taps, double from, double to) {
  constexpr int steps = 256;
  double largest = 0.0;
  for (int i = 0; i <= steps; ++i) {
    largest = std::max(largest, std::abs(gain(taps, from + (to - from) * i / steps)));
  }
  return largest;
}

}  // namespace

double kaiser_beta(double attenuation_db) {
  if (attenuation_db > 50.0) return 0.1102 * (attenuation_db - 8.7);
  if (attenuation_db > 21.0) return 0.5842 * std::pow(attenuation_db - 21.0, 0.4) + 0.07886 * (attenuation_db - 21.0);
  return 0.0;
}

std::vector<double> kaiser_low_pass(double pass, double stop, double attenuation_db) {
  check(pass, stop, attenuation_db);
  auto taps = windowed_sinc(0.5 * (pass + stop), half_length_for(stop - pass, attenuation_db), attenuation_db);
  double sum = 0.0;
  for (const double tap : taps) sum += tap;
  for (double& tap : taps) tap /= sum;
  return taps;
}

std::vector<double> half_band(double pass, double attenuation_db) {
  if (!(pass > 0.0 && pass < 0.25)) refuse("the pass band of a half-band filter must end below a quarter of the rate");
  check(pass, 0.5 - pass, attenuation_db);
  const double limit = std::pow(10.0, -attenuation_db / 20.0);
  std::size_t half = half_length_for(0.5 - 2.0 * pass, attenuation_db) | 1U;  // odd, so that the outermost tap counts
  auto taps = half_band_of_length(half, attenuation_db);
  // Kaiser's estimate is short by up to 10 dB where the transition is wide.
  while (largest_gain(taps, 0.5 - pass, 0.5) > limit) taps = half_band_of_length(half += 2, attenuation_db);
  return taps;
}

double gain(std::span<const double> taps, double frequency) {
  const std::size_t half = taps.size() / 2;
  double sum = taps[half];
  for (std::size_t k = 1; k <= half; ++k) {
    sum += 2.0 * taps[half + k] * std::cos(2.0 * pi * frequency * static_cast<double>(k));
  }
  return sum;
}

Decimator::Decimator(std::span<const double> taps, std::size_t factor)
    : half_length_(taps.size() / 2), factor_(factor), middle_(half_length_), held_(half_length_, 0.0) {
  if (taps.size() % 2 == 0) refuse("a filter without delay has an odd number of taps");
  if (factor == 0) refuse("a decimation factor is at least 1");
  middle_tap_ = taps[half_length_];
  for (std::size_t k = 1; k <= half_length_; ++k) {
    if (taps[half_length_ + k] != taps[half_length_ - k]) refuse("a filter without delay is symmetric");
    if (taps[half_length_ + k] != 0.0) pairs_.push_back({k, taps[half_length_ + k]});
  }
}

void Decimator::produce(std::vector<double>& out) {
  while (middle_ + half_length_ < held_.size()) {
    const double* at = held_.data() + middle_;
    double sum = middle_tap_ * at[0];
    for (const Pair& pair : pairs_) sum += pair.tap * (*(at - pair.distance) + at[pair.distance]);
    out.push_back(sum);
    ++produced_;
    middle_ += factor_;
  }
  const std::size_t over = std::min(middle_ - half_length_, held_.size());
  held_.erase(held_.begin(), held_.begin() + static_cast<std::ptrdiff_t>(over));
  middle_ -= over;
}

void Decimator::push(std::span<const double> in, std::vector<double>& out) {
  received_ += in.size();
  held_.insert(held_.end(), in.begin(), in.end());
  produce(out);
}

void Decimator::finish(std::vector<double>& out) {
  const std::size_t wanted = (received_ + factor_ - 1) / factor_ - produced_;
  const std::size_t before = out.size();
  held_.insert(held_.end(), half_length_ + factor_, 0.0);
  produce(out);
  out.resize(std::min(out.size(), before + wanted));
}

PyramidDecimator::PyramidDecimator(std::size_t factor, const DecimationOptions& options) {
  if (!std::has_single_bit(factor)) refuse("the pyramid's factor is a power of two");
  // Only what would fold into the kept band 0 to `stop` of the output must go in the early stages.
  for (std::size_t left = factor; left > 2; left /= 2) {
    stages_.emplace_back(half_band(options.stop / static_cast<double>(left), options.attenuation_db), 2);
  }
  if (factor >= 2) {
    stages_.emplace_back(kaiser_low_pass(0.5 * options.pass, 0.5 * options.stop, options.attenuation_db), 2);
  }
  between_.resize(stages_.size());
}

void PyramidDecimator::push(std::span<const double> in, std::vector<double>& out) {
  for (std::size_t i = 0; i < stages_.size(); ++i) {
    between_[i].clear();
    stages_[i].push(in, between_[i]);
    in = between_[i];
  }
  out.insert(out.end(), in.begin(), in.end());
}

void PyramidDecimator::finish(std::vector<double>& out) {
  std::span<const double> in;
  for (std::size_t i = 0; i < stages_.size(); ++i) {
    between_[i].clear();
    stages_[i].push(in, between_[i]);
    stages_[i].finish(between_[i]);
    in = between_[i];
  }
  out.insert(out.end(), in.begin(), in.end());
}

std::size_t PyramidDecimator::half_length() const {
  std::size_t sum = 0;
  std::size_t rate = 1;
  for (const Decimator& stage : stages_) {
    sum += stage.half_length() * rate;
    rate *= stage.factor();
  }
  return sum;
}

std::vector<double> decimated(std::span<const double> signal, std::size_t factor, const DecimationOptions& options) {
  PyramidDecimator decimator(factor, options);
  std::vector<double> out;
  out.reserve(signal.size() / factor + 1);
  decimator.push(signal, out);
  decimator.finish(out);
  return out;
}

}  // namespace stillmass::numeric
