// The bare limit of a run-up: pulses of the tacho, the vibration at 64 equal angles a turn without aliases, FFTs of 8
// turns. The rate is halved by an octave pyramid, then read through a Kaiser-windowed sinc whose cut-off follows the
// local speed (stop bands near -95 dB).
//
//   limit_runup FILE RATE     2 channels of 32-bit floats: vibration, tacho

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <numbers>
#include <vector>

#include <fftw3.h>

#include "samples.hpp"
#include "timing.hpp"

namespace {

using std::numbers::pi;

constexpr int per_turn = 64;
constexpr int turns = 8;
constexpr double beta = 9.8;         // Kaiser window of about 98 dB
constexpr int half_width = 16;       // of the sinc, in angular samples
constexpr int steps = 512;           // of its table, an angular sample
constexpr int half_band_reach = 13;  // of the halving filter

double kaiser(double x) {
  return std::abs(x) < 1.0 ? std::cyl_bessel_i(0.0, beta * std::sqrt(1.0 - x * x)) / std::cyl_bessel_i(0.0, beta) : 0.0;
}
double sinc(double x) { return x == 0.0 ? 1.0 : std::sin(pi * x) / (pi * x); }

std::vector<double> halved(const std::vector<double>& in) {
  double taps[half_band_reach + 1];
  for (int k = 0; k <= half_band_reach; ++k)
    taps[k] = 0.5 * sinc(0.5 * k) * kaiser(static_cast<double>(k) / (half_band_reach + 1));
  std::vector<double> out(in.size() / 2, 0.0);
  const std::size_t last = in.size() - half_band_reach - 1;
  const unsigned threads = bench::all_threads();
  bench::on_threads(threads, [&](unsigned t) {
    for (std::size_t i = out.size() * t / threads; i < out.size() * (t + 1) / threads; ++i) {
      if (2 * i < half_band_reach || 2 * i > last) continue;
      const double* const x = in.data() + 2 * i;
      double sum = taps[0] * x[0];
      for (int k = 1; k <= half_band_reach; k += 2) sum += taps[k] * (x[k] + x[-k]);
      out[i] = sum;
    }
  });
  return out;
}

}  // namespace

int main(int argc, char** argv) {
  if (argc != 3) bench::fail("limit_runup FILE RATE");
  const double rate = std::atof(argv[2]);
  const bench::Samples samples(argv[1], 2, 4);
  const auto frames = static_cast<std::size_t>(samples.frames());
  std::vector<char> raw;
  std::vector<double> planar;
  samples.read(0, frames, raw, planar);

  std::vector<double> pulses;
  const double* const tacho = planar.data() + frames;
  for (std::size_t i = 1; i < frames; ++i) {
    if (tacho[i - 1] < 0.5 && tacho[i] >= 0.5) {
      pulses.push_back((static_cast<double>(i - 1) + (0.5 - tacho[i - 1]) / (tacho[i] - tacho[i - 1])) / rate);
    }
  }

  std::vector<std::vector<double>> pyramid{{planar.begin(), planar.begin() + static_cast<std::ptrdiff_t>(frames)}};
  while (pyramid.size() < 6) pyramid.push_back(halved(pyramid.back()));
  std::vector<double> table(half_width * steps + 2, 0.0);
  for (std::size_t i = 0; i < table.size(); ++i) {
    const double x = static_cast<double>(i) / steps;
    table[i] = sinc(x) * kaiser(x / half_width);
  }

  std::vector<double> angular((pulses.size() - 1) * per_turn, 0.0);
  const unsigned threads = bench::all_threads();
  bench::on_threads(threads, [&](unsigned t) {
    for (std::size_t turn = (pulses.size() - 1) * t / threads; turn < (pulses.size() - 1) * (t + 1) / threads; ++turn) {
      const double length = pulses[turn + 1] - pulses[turn];
      const double wanted_rate = per_turn / length;
      std::size_t level = 0;
      double level_rate = rate;
      while (level + 1 < pyramid.size() && level_rate >= 5.0 * wanted_rate)
        level_rate = rate / static_cast<double>(1U << ++level);
      const std::vector<double>& x = pyramid[level];
      const double stretch = wanted_rate / level_rate;  // angular samples a sample
      for (int i = 0; i < per_turn; ++i) {
        const double at = (pulses[turn] + length * i / per_turn) * level_rate;
        const auto from = static_cast<std::ptrdiff_t>(std::ceil(at - half_width / stretch));
        const auto to = static_cast<std::ptrdiff_t>(std::floor(at + half_width / stretch));
        if (from < 0 || to >= std::ssize(x)) continue;
        double sum = 0.0;
        for (std::ptrdiff_t k = from; k <= to; ++k) {
          const double place = std::abs(static_cast<double>(k) - at) * stretch * steps;
          const auto cell = static_cast<std::size_t>(place);
          const double part = place - static_cast<double>(cell);
          sum += x[static_cast<std::size_t>(k)] * (table[cell] + part * (table[cell + 1] - table[cell]));
        }
        angular[turn * per_turn + static_cast<std::size_t>(i)] = sum * stretch;
      }
    }
  });

  constexpr int n = per_turn * turns;
  const std::vector<double> window = bench::hann(n);
  auto* const in = static_cast<double*>(fftw_malloc(n * sizeof(double)));
  auto* const out = static_cast<fftw_complex*>(fftw_malloc((n / 2 + 1) * sizeof(fftw_complex)));
  fftw_plan plan = fftw_plan_dft_r2c_1d(n, in, out, FFTW_ESTIMATE);
  double total = 0.0;
  for (std::size_t first = 0; first + n <= angular.size(); first += n / 4) {
    for (std::size_t i = 0; i < n; ++i) in[i] = window[i] * angular[first + i];
    fftw_execute(plan);
    for (int k = 0; k <= n / 2; ++k) total += std::hypot(out[k][0], out[k][1]);
  }
  std::printf("%zu turns %g\n", pulses.size() - 1, total);
  return 0;
}
