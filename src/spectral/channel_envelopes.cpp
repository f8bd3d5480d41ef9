#include <array>
#include <cmath>
#include <numbers>
#include <utility>

#include "stillmass/spectral/envelope.hpp"

namespace stillmass::spectral {

base::Estimate modulation_depth(const Envelope& envelope, const Tone& line) {
  base::Estimate depth;
  if (!(envelope.mean.value > 0.0)) return depth;
  depth.value = std::numbers::sqrt2 * line.amplitude_rms.value / envelope.mean.value;
  if (line.amplitude_rms.u && line.amplitude_rms.value > 0.0) {
    depth.u = depth.value * std::hypot(*line.amplitude_rms.u / line.amplitude_rms.value,
                                       envelope.mean.u.value_or(0.0) / envelope.mean.value);
  }
  return depth;
}

std::vector<ChannelEnvelope> envelopes(const recording::Reader& reader, recording::FrameRange range,
                                       std::span<const std::size_t> channels, const EnvelopeOptions& options,
                                       const base::Context& context) {
  const recording::Recording& recording = reader.recording();
  std::vector<BandSearch> searches;
  if (!options.band_hz) {
    BandSearchConsumer search(recording, range, {channels.begin(), channels.end()}, options.search);
    const std::array<recording::Consumer*, 1> consumers{&search};
    recording::run_pass(reader, range, consumers, context, "bands");
    searches = search.searches();
  }
  std::vector<ChannelEnvelope> all;
  std::vector<EnvelopeBand> bands;
  std::vector<std::size_t> whose;
  for (std::size_t i = 0; i < channels.size(); ++i) {
    const std::size_t channel = channels[i];
    const base::Refusal none{"no-valid-block", "no block of the channel is free of missing samples",
                             "record the channel again"};
    ChannelEnvelope one{channel < recording.channels.size() ? recording.channels[channel].name : std::string{},
                        std::nullopt, none};
    if (options.band_hz) {
      bands.push_back({channel, *options.band_hz});
      whose.push_back(i);
    } else {
      const auto band = chosen_band(searches[i]);
      one.search = searches[i];
      if (band) {
        bands.push_back({channel, band->band_hz});
        whose.push_back(i);
      } else {
        one.envelope = band.refusal();
      }
    }
    all.push_back(std::move(one));
  }
  if (bands.empty()) return all;
  EnvelopeConsumer consumer(recording, range, bands, options);
  const std::array<recording::Consumer*, 1> consumers{&consumer};
  recording::run_pass(reader, range, consumers, context, "envelopes");
  auto found = consumer.envelopes();
  for (std::size_t i = 0; i < found.size(); ++i) {
    ChannelEnvelope& one = all[whose[i]];
    if (found[i].spectrum.blocks == 0) continue;
    if (one.search) found[i].choice = one.search->bands[*one.search->chosen];
    one.envelope = std::move(found[i]);
  }
  return all;
}

}  // namespace stillmass::spectral
