// spectra_tool SAMPLES RATE CHANNELS BLOCK OVERLAP WINDOW AVERAGING AVERAGES RESULT
//
// SAMPLES holds float64, channel after channel; AVERAGES is the number of exponential averaging. RESULT gets float64:
// the density of each channel, then the r.m.s. amplitude of each, then, of the mean, for each channel but the first
// against the first: cross-spectrum (real and imaginary part in turn), coherence.
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <string>
#include <utility>
#include <vector>

#include "stillmass/spectral/frequency_response.hpp"
#include "stillmass/spectral/spectrum.hpp"

#include "support/memory_reader.hpp"

using namespace stillmass;

namespace {

std::vector<double> read_doubles(const char* file) {
  std::ifstream in(file, std::ios::binary | std::ios::ate);
  if (!in) throw std::runtime_error("no samples");
  std::vector<double> values(static_cast<std::size_t>(in.tellg()) / sizeof(double));
  in.seekg(0);
  in.read(reinterpret_cast<char*>(values.data()), static_cast<std::streamsize>(values.size() * sizeof(double)));
  return values;
}

void write_doubles(std::ofstream& out, const double* values, std::size_t count) {
  out.write(reinterpret_cast<const char*>(values), static_cast<std::streamsize>(count * sizeof(double)));
}

void run(char** arguments) {
  const auto samples = read_doubles(arguments[1]);
  const double rate = std::stod(arguments[2]);
  const std::size_t channels = std::stoul(arguments[3]);
  spectral::SpectrumOptions options;
  options.block_frames = std::stoul(arguments[4]);
  options.overlap = std::stod(arguments[5]);
  options.window = spectral::window_named(arguments[6]).value();
  options.averaging = spectral::averaging_named(arguments[7]).value();
  options.exponential_averages = std::stod(arguments[8]);

  std::vector<tests::MemoryChannel> planar;
  const auto frames = static_cast<std::ptrdiff_t>(samples.size() / channels);
  spectral::ReferenceAndOutputs which;
  for (std::size_t c = 0; c < channels; ++c) {
    const auto first = samples.begin() + static_cast<std::ptrdiff_t>(c) * frames;
    planar.push_back({std::to_string(c), std::vector<double>(first, first + frames)});
    if (c > 0) which.outputs.push_back(c);
  }
  const tests::MemoryReader reader(rate, std::move(planar));
  base::Context context;
  context.threads = 2;

  std::ofstream out(arguments[9], std::ios::binary);
  const auto spectra = spectral::averaged_spectra(reader, all_frames(reader), options, context);
  for (const auto& s : spectra) write_doubles(out, s.density.data(), s.density.size());
  for (const auto& s : spectra) {
    for (std::size_t k = 0; k < s.density.size(); ++k) {
      const double amplitude = s.amplitude_rms(k);
      write_doubles(out, &amplitude, 1);
    }
  }
  if (options.averaging == spectral::Averaging::mean) {
    for (const auto& s : spectral::cross_spectra(reader, all_frames(reader), which, options, context)) {
      write_doubles(out, reinterpret_cast<const double*>(s.cross.data()), 2 * s.cross.size());
      const auto coherence = spectral::frequency_response(s).coherence;
      write_doubles(out, coherence.data(), coherence.size());
    }
  }
  if (!out.flush()) throw std::runtime_error("the result cannot be written");
}

}  // namespace

int main(int count, char** arguments) try {
  if (count != 10) throw std::runtime_error("nine arguments wanted");
  run(arguments);
  return EXIT_SUCCESS;
} catch (const std::exception& error) {
  std::fprintf(stderr, "spectra_tool: %s\n", error.what());
  return EXIT_FAILURE;
}
