#include "stillmass/spectral/frequency_response.hpp"

#include <algorithm>
#include <array>
#include <utility>

#include "stillmass/base/error.hpp"
#include "stillmass/spectral/random_error.hpp"

namespace stillmass::spectral {

FrequencyResponse frequency_response(const CrossSpectrum& spectra) {
  FrequencyResponse r;
  r.input = spectra.reference;
  r.output = spectra.output;
  r.input_quantity = spectra.reference_quantity;
  r.output_quantity = spectra.output_quantity;
  r.line_hz = spectra.line_hz;
  r.blocks = spectra.blocks;
  r.averages = spectra.effective_averages;
  r.window = spectra.window;
  r.decay_s = spectra.decay_s;

  const std::size_t lines = spectra.cross.size();
  r.h1.resize(lines);
  r.h2.resize(lines);
  if (r.blocks > 1) {
    r.coherence.resize(lines);
    r.random_error.resize(lines);
  }
  for (std::size_t k = 0; k < lines; ++k) {
    const double gxx = spectra.reference_density[k];
    const double gyy = spectra.output_density[k];
    const std::complex<double> gxy = spectra.cross[k];
    const double gxy_squared = std::norm(gxy);
    if (gxx > 0.0) r.h1[k] = gxy / gxx;
    if (gxy_squared > 0.0) r.h2[k] = gyy * (gxy / gxy_squared);
    if (r.blocks > 1) {
      r.coherence[k] = gxx > 0.0 && gyy > 0.0 ? std::min(gxy_squared / gxx / gyy, 1.0) : 0.0;
      r.random_error[k] = response_error(r.coherence[k], r.averages);
    }
  }
  return r;
}

namespace {

std::vector<FrequencyResponse> of_each(const std::vector<CrossSpectrum>& spectra) {
  std::vector<FrequencyResponse> responses;
  for (const CrossSpectrum& s : spectra) responses.push_back(frequency_response(s));
  return responses;
}

}  // namespace

std::vector<FrequencyResponse> frequency_responses(const recording::Reader& reader, recording::FrameRange range,
                                                   const ReferenceAndOutputs& channels, const SpectrumOptions& options,
                                                   const base::Context& context) {
  return of_each(cross_spectra(reader, range, channels, options, context));
}

std::vector<FrequencyResponse> hit_responses(const recording::Reader& reader, std::span<const std::int64_t> starts,
                                             std::size_t block_frames, const ReferenceAndOutputs& channels,
                                             const HitWindows& windows, const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  const recording::FrameRange all{0, recording.frames};
  CrossSpectrumConsumer consumer(recording, BlockPlan::triggered(recording, all, starts, block_frames), channels,
                                 windows);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, all, consumers, context, "frequency responses");
  return of_each(consumer.spectra());
}

FrequencyResponse hit_response(std::span<const HitBlock> hits, double rate_hz, base::Quantity response_quantity,
                               const HitWindows& windows) {
  if (hits.empty()) throw base::usage_error({}, "a frequency response of no hits");
  const std::size_t n = hits.front().force.size();
  const auto frames = static_cast<std::int64_t>(n * hits.size());
  recording::Recording recording;
  recording.rate_hz = rate_hz;
  recording.frames = frames;
  recording.channels.resize(2);
  recording.channels[0].unit = base::si_unit(base::Quantity::force);
  recording.channels[1].unit = base::si_unit(response_quantity);
  recording.segments.push_back({0, frames, 0.0});

  CrossSpectrumConsumer whole(recording, BlockPlan::overlapping(recording, {0, frames}, n, 0.0), {0, {1}}, windows);
  const auto partial = whole.fresh({0, frames});
  recording::Chunk chunk;
  chunk.resize(2, n);
  for (const HitBlock& hit : hits) {
    if (hit.force.size() != n || hit.response.size() != n) throw base::usage_error({}, "hits of different lengths");
    std::copy(hit.force.begin(), hit.force.end(), chunk.channel(0).begin());
    std::copy(hit.response.begin(), hit.response.end(), chunk.channel(1).begin());
    partial->take(chunk);
    chunk.first_frame += static_cast<std::int64_t>(n);
  }
  whole.merge(*partial);
  return frequency_response(whole.spectra().front());
}

}  // namespace stillmass::spectral
