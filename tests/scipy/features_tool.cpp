// features_tool SAMPLES CHANNELS RESULT
//
// SAMPLES holds float64, channel after channel. RESULT gets float64, for each channel: mean, r.m.s., deviation, peak,
// crest factor, kurtosis, samples in the longest flat top.
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include "stillmass/recording/time_features.hpp"

#include "support/memory_reader.hpp"

using namespace stillmass;

namespace {

void run(char** arguments) {
  std::ifstream in(arguments[1], std::ios::binary | std::ios::ate);
  if (!in) throw std::runtime_error("no samples");
  std::vector<double> samples(static_cast<std::size_t>(in.tellg()) / sizeof(double));
  in.seekg(0);
  in.read(reinterpret_cast<char*>(samples.data()), static_cast<std::streamsize>(samples.size() * sizeof(double)));
  const std::size_t channels = std::stoul(arguments[2]);
  const auto frames = static_cast<std::ptrdiff_t>(samples.size() / channels);
  std::vector<tests::MemoryChannel> planar;
  for (std::size_t c = 0; c < channels; ++c) {
    const auto first = samples.begin() + static_cast<std::ptrdiff_t>(c) * frames;
    planar.push_back({std::to_string(c), std::vector<double>(first, first + frames)});
  }
  const tests::MemoryReader reader(51200.0, std::move(planar));
  base::Context context;
  context.threads = 2;
  std::ofstream out(arguments[3], std::ios::binary);
  for (const auto& f : recording::time_features(reader, all_frames(reader), context)) {
    for (const double value : {f.mean.value(), f.rms.value(), f.deviation.value(), f.peak.value(),
                               f.crest_factor.value(), f.kurtosis.value(), static_cast<double>(f.flat_top)}) {
      out.write(reinterpret_cast<const char*>(&value), sizeof value);
    }
  }
  if (!out.flush()) throw std::runtime_error("the result cannot be written");
}

}  // namespace

int main(int count, char** arguments) try {
  if (count != 4) throw std::runtime_error("three arguments wanted");
  run(arguments);
  return EXIT_SUCCESS;
} catch (const std::exception& error) {
  std::fprintf(stderr, "features_tool: %s\n", error.what());
  return EXIT_FAILURE;
}
