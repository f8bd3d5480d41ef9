// Kernels of the library without a command around them.
//
//   kernel open FILE                the recording is opened (of text: its first pass)
//   kernel read FILE [THREADS]      the samples pass by, nobody looks at them
//   kernel responses FILE           frequency responses: all channels over the first
//   kernel runup FILE               channel 1 over the pulses of channel 2: orders 1, 2, 3 and 25, 64 angles a turn
//   kernel minimax CASES            an absorber for each of the cases
//   kernel robust CASES             one absorber for the 95th percentile of the cases

#include <array>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <memory>
#include <string_view>
#include <vector>

#include "stillmass/absorber/minimax.hpp"
#include "stillmass/absorber/robust.hpp"
#include "stillmass/recording/pass.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/rotation/runup.hpp"
#include "stillmass/spectral/cross_spectrum.hpp"

#include "cases.hpp"
#include "timing.hpp"

namespace {

using namespace stillmass;

class Nobody : public recording::Consumer {
 public:
  std::unique_ptr<Consumer> fresh(recording::FrameRange /*owned*/) const override { return std::make_unique<Nobody>(); }
  void take(const recording::Chunk& chunk) override { frames += chunk.frames; }
  void merge(Consumer& next) override { frames += dynamic_cast<Nobody&>(next).frames; }
  std::size_t frames = 0;
};

void read(const recording::Reader& reader, const base::Context& context) {
  Nobody nobody;
  const std::array<recording::Consumer*, 1> consumers{&nobody};
  recording::run_pass(reader, {0, reader.recording().frames}, consumers, context, "reading");
  std::printf("%zu frames\n", nobody.frames);
}

void responses(const recording::Reader& reader, const base::Context& context) {
  spectral::ReferenceAndOutputs which;
  which.reference = 0;
  for (std::size_t c = 1; c < reader.recording().channels.size(); ++c) which.outputs.push_back(c);
  spectral::SpectrumOptions options;
  options.block_frames = 8192;
  const auto spectra = spectral::cross_spectra(reader, {0, reader.recording().frames}, which, options, context);
  std::printf("%zu blocks\n", spectra.front().blocks);
}

void runup(const recording::Reader& reader, const base::Context& context) {
  rotation::RunupSettings settings;
  settings.tacho_channel = 1;
  settings.orders.orders = {1.0, 2.0, 3.0, 25.0};
  settings.orders.channels = {0};
  settings.with_waterfall = false;
  const auto found = rotation::runup(reader, settings, context);
  if (!found) bench::fail("refused");
  std::printf("%zu blocks\n", found->tracks.front().value.size());
}

void minimax(std::size_t count, const base::Context& context) {
  std::vector<absorber::SizingProblem> problems;
  for (const bench::Case& each : bench::cases(count)) {
    absorber::SizingProblem problem;
    problem.mass_ratio = each.mass_ratio;
    problem.machine_damping = each.damping;
    problems.push_back(problem);
  }
  bench::timed([&] {
    const auto all = absorber::minimax_each(problems, context);
    std::printf("%.9g %.9g\n", all[0].tuning, all[0].height);
  });
}

void robust(std::size_t count, const base::Context& context) {
  std::vector<absorber::MachineCase> machines;
  for (const bench::Case& each : bench::cases(count))
    machines.push_back({each.mass_ratio, each.damping, each.frequency});
  bench::timed([&] {
    const auto found =
        absorber::robust(machines, absorber::Forcing::constant, absorber::Objective::velocity, 0.95, context);
    std::printf("%.6g %.6g %.9g\n", found.tuning, found.damping_ratio, found.cost);
  });
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 3) bench::fail("kernel open|read|responses|runup|minimax|robust WHAT [THREADS]");
  const std::string_view name = argv[1];
  base::Context context;
  context.threads = argc > 3 ? static_cast<unsigned>(std::atoi(argv[3])) : bench::all_threads();
  if (name == "minimax" || name == "robust") {
    const auto count = static_cast<std::size_t>(std::atoll(argv[2]));
    name == "minimax" ? minimax(count, context) : robust(count, context);
    return 0;
  }
  const auto reader = recording::open(argv[2]);
  if (name == "read") read(*reader, context);
  if (name == "responses") responses(*reader, context);
  if (name == "runup") runup(*reader, context);
  return 0;
}
