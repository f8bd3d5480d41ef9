// The bare limit of a run-up: pulses of the tacho, the vibration at 64 equal angles a turn without aliases, FFTs of 8
// turns. The rate is halved by an octave pyramid, then read through a Kaiser-windowed sinc whose cut-off follows the
// local speed (stop bands near -95 dB).
//
//   limit_runup FILE RATE     2 channels of 32-bit floats: vibration, tacho

#include <algorithm>
#include <array>
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

struct Filters {
  std::array<double, half_band_reach + 1> half_band{};
  std::vector<double> sinc_table;

  Filters() : sinc_table(half_width * steps + 2, 0.0) {
    for (int k = 0; k <= half_band_reach; ++k) {
      half_band[static_cast<std::size_t>(k)] =
          0.5 * sinc(0.5 * k) * kaiser(static_cast<double>(k) / (half_band_reach + 1));
    }
    for (std::size_t i = 0; i < sinc_table.size(); ++i) {
      const double x = static_cast<double>(i) / steps;
      sinc_table[i] = sinc(x) * kaiser(x / half_width);
    }
  }
};

// out[i] stands where in[2 i] stood; its ends are of no use.
void halve(const Filters& filters, std::vector<double>& x) {
  const std::size_t count = x.size() / 2;
  std::vector<double> out(count, 0.0);
  for (std::size_t i = half_band_reach / 2 + 1; 2 * i + half_band_reach < x.size(); ++i) {
    const double* const at = x.data() + 2 * i;
    double sum = filters.half_band[0] * at[0];
    for (int k = 1; k <= half_band_reach; k += 2)
      sum += filters.half_band[static_cast<std::size_t>(k)] * (at[k] + at[-k]);
    out[i] = sum;
  }
  x.swap(out);
}

std::vector<double> pulses_of(const bench::Samples& samples, double rate) {
  constexpr std::int64_t piece = 16384;
  std::vector<double> pulses;
  std::vector<char> raw;
  std::vector<double> planar;
  for (std::int64_t first = 0; first + 1 < samples.frames(); first += piece - 1) {
    const auto count = static_cast<std::size_t>(std::min(piece, samples.frames() - first));
    samples.read(first, count, raw, planar);
    const double* const tacho = planar.data() + count;
    for (std::size_t i = 1; i < count; ++i) {
      if (tacho[i - 1] >= 0.5 || tacho[i] < 0.5) continue;
      const double part = (0.5 - tacho[i - 1]) / (tacho[i] - tacho[i - 1]);
      pulses.push_back((static_cast<double>(first) + static_cast<double>(i - 1) + part) / rate);
    }
  }
  return pulses;
}

// The angular samples of the turns [from, to), from the frames they need.
void resample(const bench::Samples& samples, double rate, const Filters& filters, const std::vector<double>& pulses,
              std::size_t from, std::size_t to, double* angular) {
  double shortest = pulses[from + 1] - pulses[from];
  double longest = shortest;
  for (std::size_t turn = from; turn < to; ++turn) {
    shortest = std::min(shortest, pulses[turn + 1] - pulses[turn]);
    longest = std::max(longest, pulses[turn + 1] - pulses[turn]);
  }
  int levels = 0;
  while (rate / (2 << levels) >= 2.5 * per_turn / shortest) ++levels;
  const double margin = longest * half_width / per_turn + (half_band_reach + 2) * (2 << levels) / rate;
  const auto first = std::max<std::int64_t>(0, static_cast<std::int64_t>((pulses[from] - margin) * rate));
  const auto last = std::min(samples.frames(), static_cast<std::int64_t>((pulses[to] + margin) * rate) + 2);
  std::vector<char> raw;
  std::vector<double> x;
  samples.read(first, static_cast<std::size_t>(last - first), raw, x);
  x.resize(static_cast<std::size_t>(last - first));
  for (int i = 0; i < levels; ++i) halve(filters, x);

  const double level_rate = rate / (1 << levels);
  for (std::size_t turn = from; turn < to; ++turn) {
    const double length = pulses[turn + 1] - pulses[turn];
    const double stretch = per_turn / length / level_rate;  // angular samples a sample
    for (int i = 0; i < per_turn; ++i) {
      const double at = (pulses[turn] + length * i / per_turn - static_cast<double>(first) / rate) * level_rate;
      const auto begin = static_cast<std::ptrdiff_t>(std::ceil(at - half_width / stretch));
      const auto end = static_cast<std::ptrdiff_t>(std::floor(at + half_width / stretch));
      if (begin < 0 || end >= std::ssize(x)) continue;
      double sum = 0.0;
      for (std::ptrdiff_t k = begin; k <= end; ++k) {
        const double place = std::abs(static_cast<double>(k) - at) * stretch * steps;
        const auto cell = static_cast<std::size_t>(static_cast<int>(place));
        const double part = place - static_cast<double>(static_cast<int>(place));
        const double* const node = filters.sinc_table.data() + cell;
        sum += x[static_cast<std::size_t>(k)] * (node[0] + part * (node[1] - node[0]));
      }
      angular[turn * per_turn + static_cast<std::size_t>(i)] = sum * stretch;
    }
  }
}

}  // namespace

int main(int argc, char** argv) {
  if (argc != 3) bench::fail("limit_runup FILE RATE");
  const double rate = std::atof(argv[2]);
  const bench::Samples samples(argv[1], 2, 4);
  const std::vector<double> pulses = pulses_of(samples, rate);
  const std::size_t count = pulses.size() - 1;
  const Filters filters;
  std::vector<double> angular(count * per_turn, 0.0);
  const unsigned threads = bench::all_threads();
  bench::on_threads(threads, [&](unsigned t) {
    constexpr std::size_t at_once = 16;
    for (std::size_t turn = count * t / threads; turn < count * (t + 1) / threads; turn += at_once) {
      resample(samples, rate, filters, pulses, turn, std::min(turn + at_once, count * (t + 1) / threads),
               angular.data());
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
    for (int k = 0; k <= n / 2; ++k) total += std::sqrt(out[k][0] * out[k][0] + out[k][1] * out[k][1]);
  }
  std::printf("%zu turns %g\n", count, total);
  return 0;
}
