// Facts about measured recordings that are kept beside the project: what each file's own text and its data set say.
#include "stillmass/recording/reader.hpp"
#include "stillmass/recording/sample_quality.hpp"

#include "recording/reading.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass;
using namespace stillmass::tests;

namespace {

std::unique_ptr<recording::Reader> measured(const char* name) {
  const auto file = measured_recording(name);
  if (!file) {
    WARN("skipped: no measured recordings here");
    return nullptr;
  }
  return recording::open(*file);
}

}  // namespace

TEST_CASE("a battery node's blow on a footbridge has two gaps of 16 ms") {
  const auto reader = measured("footbridge-blow-node.csv");
  if (!reader) return;
  const auto& recording = reader->recording();
  CHECK(recording.frames == 74000);
  CHECK(recording.rate_hz == Approx(7200.0).epsilon(1e-4));
  REQUIRE(recording.segments.size() == 3);
  CHECK(recording.segments[1].first_frame == 9602);
  CHECK(recording.segments[2].first_frame == 9606);
  std::size_t gaps = 0;
  for (const auto& finding : recording.findings) {
    if (finding.code != base::Code::gap) continue;
    ++gaps;
    CHECK(*finding.to_s - *finding.from_s == Approx(0.01627).epsilon(1e-3));
  }
  CHECK(gaps == 2);
  CHECK(found(recording.findings, base::Code::uneven_times) == nullptr);
  const auto samples = all_samples(*reader)[0];
  CHECK(samples[0] == 0.0);
  CHECK(samples[1] == -1.0516667);
  // The bogus first row stands out.
  const auto quality = recording::sample_quality(*reader, {0, recording.frames}, {});
  const auto* spike = found(quality[0].findings, base::Code::spikes);
  REQUIRE(spike != nullptr);
  CHECK(*spike->from_s == 0.0);
}

TEST_CASE("three wired accelerometers on a footbridge are read at 6400 Hz in g") {
  const auto reader = measured("footbridge-mode2.txt");
  if (!reader) return;
  const auto& recording = reader->recording();
  CHECK(recording.rate_hz == 6400.0);
  CHECK(recording.frames == 60000);
  REQUIRE(recording.channels.size() == 3);
  CHECK(recording.channels[2].name == "Acceleration_2");
  CHECK(recording.channels[2].unit.name == "g");
  CHECK(recording.format == "CSV: comma, decimal point, 23 header lines, time in column 1 [s, assumed]");
  CHECK(recording.findings.empty());
  CHECK(all_samples(*reader)[0][0] == Approx(-0.003235 * base::standard_gravity).epsilon(1e-14));
}

TEST_CASE("a shaker's beam is read at 3200 Hz from its times, not from its stale header") {
  const auto reader = measured("shaker-beam-tones.txt");
  if (!reader) return;
  const auto& recording = reader->recording();
  CHECK(recording.rate_hz == 3200.0);
  CHECK(recording.frames == 63041);
  REQUIRE(recording.channels.size() == 3);
  CHECK(recording.channels[0].unit.name == "V");
  CHECK(recording.channels[1].unit.name == "lbf");
  CHECK(recording.channels[1].role == recording::Role::force);
  CHECK(recording.channels[2].unit.name == "g");
  CHECK(recording.format == "CSV: tab, decimal point, 23 header lines, time in column 1 [s, assumed]");
  CHECK(recording.findings.empty());
}

TEST_CASE("a model tower's jittery log is read at about 19 Hz, its second table left out") {
  const auto reader = measured("model-tower-jittery.csv");
  if (!reader) return;
  const auto& recording = reader->recording();
  CHECK(recording.rate_hz == Approx(19.37).epsilon(1e-3));
  REQUIRE(recording.channels.size() == 1);
  CHECK(recording.channels[0].name == "With TMD");
  CHECK(recording.channels[0].unit.name == "m/s2");
  CHECK(recording.segments.size() == 1);
  CHECK(recording.duration_s() == Approx(7.227).margin(0.06));
  CHECK(recording.format.find("second table") != std::string::npos);
  CHECK(found(recording.findings, base::Code::uneven_times) != nullptr);
}
