// Recordings that are too slow, too short, half of the story or of the wrong kind: an answer without the part that they
// cannot give, never a stop.
#include <algorithm>
#include <cmath>

#include "stillmass/step/diagnosis.hpp"

#include "step/spectrum_signals.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using tests::acceleration;
using tests::analysed;
using tests::MemoryReader;
using tests::two_pole_fan;

namespace {

bool refused(const step::SpectrumResult& result, const std::string& code) {
  return std::any_of(result.refusals.begin(), result.refusals.end(),
                     [&](const base::Refusal& each) { return each.code == code; });
}

std::vector<const step::SpectralPeak*> peaks_near(const step::ChannelSpectrum& channel, double frequency,
                                                  double within) {
  std::vector<const step::SpectralPeak*> out;
  for (const step::SpectralPeak& peak : channel.peaks) {
    if (std::abs(peak.tone.frequency.value - frequency) < within) out.push_back(&peak);
  }
  return out;
}

}  // namespace

TEST_CASE("a logger whose half rate is where the standard's band begins gives peaks and no level") {
  const numeric::Random random(3);
  std::vector<double> x(12000);
  for (std::size_t i = 0; i < x.size(); ++i) {
    x[i] = std::cos(tests::two_pi * 2.1 * static_cast<double>(i) / 20.0) +
           0.05 * random.normal(1, static_cast<std::uint32_t>(i));
  }
  const MemoryReader reader(20.0, {{"slow", x}});
  const auto result = step::spectrum(reader, {}, {});
  CHECK_FALSE(result.channels.front().overall);
  CHECK_FALSE(result.channels.front().severity_velocity);
  CHECK_FALSE(result.channels.front().peaks.empty());
  step::SpectrumRequest fast;
  fast.speed_hz = 24.6;  // beyond half the rate
  CHECK(step::spectrum(reader, fast, {}).speed->value == 24.6);
}

TEST_CASE("lines too coarse for a deflection at 1x leave it out") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.options.resolution_hz = 16.0;  // 1x on line 3: its lobe would reach that of 0 Hz
  const auto result = analysed({{"fan-h", acceleration(10.0, {{49.7, 1e-3, 0.3}}, 0.02, 1)},
                                {"fan-v", acceleration(10.0, {{49.7, 1e-3, 0.3}}, 0.02, 2)}},
                               request);
  CHECK(result.shapes.empty());
  CHECK_FALSE(result.channels.front().peaks.empty());
}

TEST_CASE("a background that is shorter than a block, or of other channels, is refused and the rest answered") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const auto x = acceleration(20.0, {{49.7, 1e-3, 0.3}}, 0.02, 3);
  const MemoryReader brief(tests::rate, {{"fan-h", acceleration(0.5, {}, 0.02, 4)}});
  request.background.reader = &brief;
  CHECK(refused(analysed({{"fan-h", x}}, request), "no-background"));
  const MemoryReader other(tests::rate, {{"pump-h", acceleration(20.0, {}, 0.02, 5)}});
  request.background.reader = &other;
  CHECK(refused(analysed({{"fan-h", x}}, request), "no-background"));
}

TEST_CASE("a background of another rate has no lines of this spectrum, however many lines are asked for") {
  step::SpectrumRequest request;
  request.options.lines = 400;
  const auto x = acceleration(20.0, {{49.7, 1e-3, 0.3}}, 0.02, 6);
  const MemoryReader slower(0.5 * tests::rate, {{"fan-h", acceleration(20.0, {}, 0.02, 7)}});
  request.background.reader = &slower;
  const auto result = analysed({{"fan-h", x}}, request);
  CHECK(result.channels.front().background);
  CHECK(result.channels.front().background_density.empty());
}

TEST_CASE("a neighbour's line beside 1x does not take 1x into the background") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.options.resolution_hz = 1.0;
  const MemoryReader stopped(tests::rate, {{"fan-h", acceleration(60.0, {{49.95, 0.8e-3, 0.0}}, 0.02, 8)}});
  request.background.reader = &stopped;
  const auto result =
      analysed({{"fan-h", acceleration(60.0, {{49.7, 1e-3, 0.3}, {49.95, 0.8e-3, 1.0}}, 0.02, 9)}}, request);
  const auto own = peaks_near(result.channels.front(), 49.7, 0.05);
  const auto neighbour = peaks_near(result.channels.front(), 49.95, 0.05);
  REQUIRE(own.size() == 1);
  REQUIRE(neighbour.size() == 1);
  CHECK(neighbour.front()->in_background());
  CHECK_FALSE(own.front()->in_background());
  CHECK(own.front()->cause.text == "1x");
}

TEST_CASE("tones that two bands of the finer look both hold are listed once") {
  step::SpectrumRequest request;
  request.options.resolution_hz = 1.0;
  const double f = 60.2;
  const std::vector<tests::Part> parts = {
      {f, 1e-3, 0.3}, {f + 0.2, 0.7e-3, 1.0}, {f + 2.6, 0.9e-3, 2.0}, {f + 2.85, 0.6e-3, 0.5}};
  const auto result = analysed({{"anything", acceleration(60.0, parts, 0.02, 10)}}, request);
  for (const tests::Part& part : parts) {
    CAPTURE(part.frequency);
    CHECK(peaks_near(result.channels.front(), part.frequency, 0.05).size() == 1);
  }
}

TEST_CASE("the flank of the next peak is not listed as a tone") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const auto result =
      analysed({{"fan-h", acceleration(60.0, {{49.7, 0.3e-3, 0.3}, {50.15, 1e-3, 1.0}}, 0.02, 9)}}, request);
  CHECK(peaks_near(result.channels.front(), 49.925, 0.1).empty());
  CHECK(peaks_near(result.channels.front(), 49.7, 0.01).size() == 1);
  CHECK(peaks_near(result.channels.front(), 50.15, 0.01).size() == 1);
}

TEST_CASE("the greatest of the blocks is no level: no zone, no cause") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.plant.alarm = 3e-3;
  request.options.averaging = spectral::Averaging::peak_hold;
  const auto result = analysed({{"fan-h", acceleration(20.0, {{49.7, 2e-3, 0.3}}, 0.5, 11)}}, request);
  const step::ChannelSpectrum& channel = result.channels.front();
  CHECK_FALSE(channel.severity);
  CHECK(channel.severity.refusal().seen.find("peak hold") != std::string::npos);
  CHECK_FALSE(channel.severity_velocity);
  CHECK_FALSE(channel.plant);
  CHECK(result.causes.empty());
}

TEST_CASE("an unusable channel is held against no range and no limit of the plant") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.site.plant.alarm = 1e-3;
  request.unusable = {"fan-h"};
  const auto result = analysed({{"fan-h", acceleration(20.0, {{49.7, 2e-3, 0.3}}, 0.02, 12)}}, request);
  CHECK_FALSE(result.channels.front().typical);
  CHECK_FALSE(result.channels.front().plant);
}

TEST_CASE("a channel of missing samples beside a good one leaves the good one whole") {
  const std::vector<double> none(static_cast<std::size_t>(20.0 * tests::rate), std::nan(""));
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  const auto result =
      analysed({{"fan-h", none}, {"fan-v", acceleration(20.0, {{49.7, 2e-3, 0.3}}, 0.02, 13)}}, request);
  CHECK(result.channels[0].findings.front().code == base::Code::missing_values);
  CHECK(result.channels[1].severity);
  CHECK(result.worst == 1);
  CHECK_FALSE(result.causes.empty());
}

TEST_CASE("one block, a recording of force only and one of tacho only are answered") {
  step::SpectrumRequest request;
  request.site = two_pole_fan();
  request.options.block_frames = 4096;
  const auto x = acceleration(1.0, {{49.7, 2e-3, 0.3}}, 0.02, 14);
  const auto one = analysed({{"fan-h", x}, {"fan-v", x}}, request);
  CHECK(one.channels.front().measured.blocks == 1);
  request.options.block_frames = 0;
  const auto force = analysed({{"fan-h", x, base::Quantity::force, recording::Role::force}}, request);
  CHECK(force.channels.size() == 1);
  CHECK_FALSE(force.channels.front().severity);
  const auto tacho = analysed({{"tacho", x, base::Quantity::ratio, recording::Role::tacho}}, request);
  CHECK(tacho.channels.empty());
}
