// envelope_tool SAMPLES RATE LO HI BLOCK RESULT
//
// SAMPLES holds float64 of one channel. RESULT gets float64: mean and kurtosis of the envelope in the band LO to HI,
// how many lines its spectrum has and their density; then for each band of the search from 1 kHz on its edges and
// kurtosis.
#include <array>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <stdexcept>
#include <string>
#include <vector>

#include "stillmass/spectral/envelope.hpp"

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

void run(char** arguments) {
  const tests::MemoryReader reader(std::stod(arguments[2]), {{"x", read_doubles(arguments[1])}});
  const auto range = tests::all_frames(reader);
  const base::Interval band{std::stod(arguments[3]), std::stod(arguments[4])};
  const spectral::SpectrumOptions lines{.block_frames = std::stoul(arguments[5])};
  base::Context context;
  context.threads = 2;
  spectral::EnvelopeConsumer envelope(reader.recording(), range, {{0, band}}, {.spectrum = lines});
  spectral::BandSearchConsumer search(reader.recording(), range, {0});
  const std::array<recording::Consumer*, 2> both{&envelope, &search};
  recording::run_pass(reader, range, both, context, "envelopes");

  const auto found = envelope.envelopes().front();
  std::vector<double> result{found.mean.value, found.kurtosis, static_cast<double>(found.spectrum.density.size())};
  result.insert(result.end(), found.spectrum.density.begin(), found.spectrum.density.end());
  const auto searched = search.searches();
  for (const auto& each : searched.front().bands) {
    result.insert(result.end(), {each.band_hz.lo, each.band_hz.hi, each.kurtosis});
  }
  std::ofstream out(arguments[6], std::ios::binary);
  out.write(reinterpret_cast<const char*>(result.data()), static_cast<std::streamsize>(result.size() * sizeof(double)));
  if (!out.flush()) throw std::runtime_error("the result cannot be written");
}

}  // namespace

int main(int count, char** arguments) try {
  if (count != 7) throw std::runtime_error("six arguments wanted");
  run(arguments);
  return EXIT_SUCCESS;
} catch (const std::exception& error) {
  std::fprintf(stderr, "envelope_tool: %s\n", error.what());
  return EXIT_FAILURE;
}
