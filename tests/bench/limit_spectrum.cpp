// The bare limit of averaged spectra: FFTW in double on every block of every channel, powers summed, on all threads.
//
//   limit_spectrum FILE BYTES LENGTH HOP [responses]     8 channels, BYTES a sample (4: float, 3: integer)
//
// With `responses`: auto-spectra of all channels and the cross-spectra of the others with the first.

#include <complex>
#include <cstdio>
#include <cstdlib>
#include <mutex>
#include <vector>

#include <fftw3.h>

#include "samples.hpp"
#include "timing.hpp"

namespace {

constexpr int channels = 8;
constexpr std::int64_t blocks_a_piece = 16;

struct Sums {
  std::vector<double> power;
  std::vector<std::complex<double>> cross;
};

struct Work {
  const bench::Samples& samples;
  std::size_t length;
  std::int64_t hop;
  bool responses;
  fftw_plan plan;
  std::vector<double> window;
};

double* aligned(std::size_t count) { return static_cast<double*>(fftw_malloc(count * sizeof(double))); }

// Blocks [from, to).
void sum_up(const Work& work, std::int64_t from, std::int64_t to, Sums& sums) {
  const std::size_t lines = work.length / 2 + 1;
  sums.power.assign(lines * channels, 0.0);
  sums.cross.assign(work.responses ? lines * channels : 0, {});
  double* const in = aligned(work.length);
  double* const out = aligned(2 * lines * channels);
  std::vector<char> raw;
  std::vector<double> planar;
  for (std::int64_t piece = from; piece < to; piece += blocks_a_piece) {
    const std::int64_t blocks = std::min(blocks_a_piece, to - piece);
    const std::size_t count = static_cast<std::size_t>((blocks - 1) * work.hop) + work.length;
    work.samples.read(piece * work.hop, count, raw, planar);
    for (std::int64_t block = 0; block < blocks; ++block) {
      for (std::size_t c = 0; c < channels; ++c) {
        const double* const x = planar.data() + c * count + static_cast<std::size_t>(block * work.hop);
        double* const spectrum = out + (work.responses ? 2 * lines * c : 0);
        for (std::size_t i = 0; i < work.length; ++i) in[i] = work.window[i] * x[i];
        fftw_execute_dft_r2c(work.plan, in, reinterpret_cast<fftw_complex*>(spectrum));
        double* const power = sums.power.data() + c * lines;
        for (std::size_t k = 0; k < lines; ++k) {
          power[k] += spectrum[2 * k] * spectrum[2 * k] + spectrum[2 * k + 1] * spectrum[2 * k + 1];
        }
        if (!work.responses || c == 0) continue;
        auto* const cross = reinterpret_cast<double*>(sums.cross.data() + c * lines);
        for (std::size_t k = 0; k < 2 * lines; k += 2) {
          cross[k] += out[k] * spectrum[k] + out[k + 1] * spectrum[k + 1];
          cross[k + 1] += out[k] * spectrum[k + 1] - out[k + 1] * spectrum[k];
        }
      }
    }
  }
  fftw_free(in);
  fftw_free(out);
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 5) bench::fail("limit_spectrum FILE BYTES LENGTH HOP [responses]");
  const bench::Samples samples(argv[1], channels, std::atoi(argv[2]));
  Work work{samples, static_cast<std::size_t>(std::atoll(argv[3])), std::atoll(argv[4]), argc > 5, nullptr, {}};
  work.window = bench::hann(work.length);
  double* const in = aligned(work.length);
  double* const out = aligned(work.length + 2);
  work.plan = fftw_plan_dft_r2c_1d(static_cast<int>(work.length), in, reinterpret_cast<fftw_complex*>(out),
                                   FFTW_ESTIMATE | FFTW_PRESERVE_INPUT);
  const std::int64_t blocks = (samples.frames() - static_cast<std::int64_t>(work.length)) / work.hop + 1;
  const unsigned threads = bench::all_threads();
  std::vector<Sums> sums(threads);
  bench::on_threads(threads,
                    [&](unsigned t) { sum_up(work, blocks * t / threads, blocks * (t + 1) / threads, sums[t]); });
  double total = 0.0;
  for (const Sums& each : sums) {
    for (const double power : each.power) total += power;
    for (const auto& cross : each.cross) total += std::abs(cross);
  }
  std::printf("%lld blocks %g\n", static_cast<long long>(blocks), total);
  return 0;
}
