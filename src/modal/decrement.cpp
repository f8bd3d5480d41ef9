#include "stillmass/modal/decrement.hpp"

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <vector>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/numeric/least_squares.hpp"
#include "stillmass/numeric/matrix.hpp"
#include "stillmass/numeric/statistics.hpp"

namespace stillmass::modal {
namespace {

using Complex = std::complex<double>;
constexpr double two_pi = 2.0 * std::numbers::pi;
constexpr std::size_t points_per_smoother = 2;
constexpr double above_noise = 3.0;
constexpr std::size_t least_smoothers = 4;
constexpr double least_decay_db = 6.0;

void require(bool holds, const char* what) {
  if (!holds) throw base::Error(base::ErrorKind::internal, "modal/decrement", what);
}

/// The slowly turning envelope of what is around `centre_hz`, twice in the length of the smoother.
struct Envelope {
  std::vector<double> time_s;
  std::vector<Complex> value;
};

Envelope demodulated(std::span<const double> samples, double rate_hz, double centre_hz, std::size_t smoother) {
  std::vector<Complex> taps(smoother);
  double sum = 0.0;
  for (std::size_t i = 0; i < smoother; ++i) {
    const double place = (static_cast<double>(i) + 0.5) / static_cast<double>(smoother);
    const double hann = 0.5 - 0.5 * std::cos(two_pi * place);
    taps[i] = std::polar(hann, -two_pi * centre_hz * static_cast<double>(i) / rate_hz);
    sum += hann;
  }
  Envelope envelope;
  const std::size_t step = std::max<std::size_t>(1, smoother / points_per_smoother);
  for (std::size_t start = 0; start + smoother <= samples.size(); start += step) {
    Complex value = 0.0;
    for (std::size_t i = 0; i < smoother; ++i) value += taps[i] * samples[start + i];
    const double start_s = static_cast<double>(start) / rate_hz;
    envelope.time_s.push_back(start_s);
    envelope.value.push_back(2.0 / sum * value * std::polar(1.0, -two_pi * centre_hz * start_s));
  }
  return envelope;
}

struct Line {
  double slope;
  double u;
};

Line straight_line(std::span<const double> t, std::span<const double> y, std::span<const double> weights) {
  numeric::Matrix design(t.size(), 2);
  for (std::size_t i = 0; i < t.size(); ++i) {
    design(i, 0) = 1.0;
    design(i, 1) = t[i];
  }
  const numeric::LinearFit fit = numeric::least_squares(design, y, weights);
  return {fit.x[1], std::sqrt(fit.covariance(1, 1))};
}

}  // namespace

double damping_of_decrement(double decrement) {
  require(decrement >= 0.0, "a decrement is not negative");
  return decrement / std::hypot(two_pi, decrement);
}

double decrement_of_damping(double damping_ratio) {
  require(damping_ratio >= 0.0 && damping_ratio < 1.0, "a damping ratio lies between 0 and 1");
  return two_pi * damping_ratio / std::sqrt(1.0 - damping_ratio * damping_ratio);
}

double logarithmic_decrement(std::span<const double> peaks) {
  require(peaks.size() >= 2 && std::ranges::all_of(peaks, [](double x) { return x > 0.0; }),
          "a decrement needs two peaks above 0");
  std::vector<double> number;
  std::vector<double> logarithm;
  for (const double peak : peaks) {
    number.push_back(static_cast<double>(number.size()));
    logarithm.push_back(std::log(peak));
  }
  return -straight_line(number, logarithm, {}).slope;
}

base::Answer<RingDown> ring_down(std::span<const double> samples, double rate_hz, base::Interval band_hz) {
  require(rate_hz > 0.0 && band_hz.lo > 0.0 && band_hz.hi > band_hz.lo && band_hz.hi < 0.5 * rate_hz,
          "a band lies between 0 and half the rate");
  // The first zeros of the smoother's response lie at the ends of the band.
  const auto smoother = static_cast<std::size_t>(std::ceil(4.0 * rate_hz / band_hz.width()));
  const double centre = band_hz.middle();
  const Envelope envelope = demodulated(samples, rate_hz, centre, smoother);

  std::vector<double> size;
  for (const Complex z : envelope.value) size.push_back(std::abs(z));
  const double floor = size.empty() ? 0.0 : numeric::quantile(size, 0.05);
  std::size_t used = 0;
  while (used < size.size() && size[used] > above_noise * floor) ++used;
  const double decay_db = used > 1 ? 20.0 * std::log10(size.front() / size[used - 1]) : 0.0;
  if (used < least_smoothers * points_per_smoother || decay_db < least_decay_db) {
    return base::Refusal{"short-decay",
                         "between " + base::rounded(band_hz.lo) + " and " + base::rounded(band_hz.hi) +
                             " Hz the decay can be followed over " + base::rounded(std::max(0.0, decay_db), 2) +
                             " dB only",
                         "strike harder, and let the vibration die away before the next blow"};
  }

  std::vector<double> logarithm;
  std::vector<double> phase;
  std::vector<double> weights;
  for (std::size_t i = 0; i < used; ++i) {
    logarithm.push_back(std::log(size[i]));
    weights.push_back(size[i] * size[i] / (size.front() * size.front()));
    const double turn = i == 0 ? 0.0 : std::arg(envelope.value[i] / envelope.value[i - 1]);
    phase.push_back(i == 0 ? 0.0 : phase.back() + turn);
  }
  const auto times = std::span(envelope.time_s).first(used);
  const Line decay = straight_line(times, logarithm, weights);
  const Line turning = straight_line(times, phase, weights);

  const double damped = two_pi * centre + turning.slope;
  const double omega = std::hypot(damped, decay.slope);
  const double dof = static_cast<double>(used) - 2.0;
  RingDown result;
  result.frequency = {omega / two_pi, turning.u / two_pi, dof, base::Quantity::frequency};
  result.damping_ratio = {-decay.slope / omega, decay.u / omega, dof, base::Quantity::ratio};
  result.fitted_s = times.back();
  result.decay_db = decay_db;
  return result;
}

}  // namespace stillmass::modal
