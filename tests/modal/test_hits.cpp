#include <algorithm>
#include <cmath>
#include <numeric>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/hits.hpp"

#include "modal/clipping.hpp"
#include "modal/hammer_simulation.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using modal::HitVerdict;

namespace {

bool has(const std::vector<base::Finding>& findings, base::Code code) {
  return std::ranges::any_of(findings, [&](const base::Finding& f) { return f.code == code; });
}

}  // namespace

TEST_CASE("every blow is found and each imperfect one refused for its own reason") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 64.0;
  simulation.blows = tests::regular_blows(8, 8.0);
  simulation.blows.push_back({simulation.blows[2].start_s + 0.07, 250.0, 0.005});  // the hammer bounced
  simulation.blows[4].peak_n = 3000.0;                                             // beyond the full scale of 2000 N
  simulation.blows[5].peak_n = 90.0;
  const auto reader = simulation.reader();
  const modal::HitSearch search = modal::find_hits(*reader, {}, {});
  REQUIRE(search.hits.size() == 8);
  const HitVerdict expected[] = {HitVerdict::used,     HitVerdict::used,     HitVerdict::double_hit, HitVerdict::used,
                                 HitVerdict::overload, HitVerdict::weak_hit, HitVerdict::used,       HitVerdict::used};
  for (std::size_t i = 0; i < 8; ++i) {
    CHECK(search.hits[i].verdict == expected[i]);
    CHECK(search.hits[i].used == search.hits[i].reason.empty());
    // A tenth of the peak is reached after 0.1 / pi of contact; a sample is 0.5 ms.
    CHECK(search.hits[i].time_s == Approx(simulation.blows[i].start_s).margin(0.001));
  }
  // The peak lies between two samples (up to 1.2 % lower) and passes the recorder's filter: 2 % of it.
  CHECK(search.hits[0].peak == Approx(simulation.blows[0].peak_n).epsilon(0.02));
  // Above a tenth of the peak for 0.936 of contact, counted in whole samples.
  CHECK(*search.hits[0].contact_s == Approx(0.936 * simulation.blows[0].contact_s).margin(0.0006));
  CHECK(search.hits[2].reason.find("ms after the first") != std::string::npos);
  CHECK(has(search.findings, base::Code::double_hit));
  CHECK(has(search.findings, base::Code::overload));
  CHECK(has(search.findings, base::Code::weak_hit));
  CHECK(search.blocks.size() == 5);
  CHECK(search.force_point == "p2");
  CHECK(search.responses.front().point == "p2");
}

TEST_CASE("the force outside its window is exactly zero and its impulse is kept") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 20.0;
  simulation.blows = {{2.0, 800.0, 0.005}, {10.0, 800.0, 0.005}};
  const auto reader = simulation.reader();
  const auto search = modal::find_hits(*reader, {}, {});
  REQUIRE(search.blocks.size() == 2);
  const auto& block = search.blocks.front();
  const double impulse = std::accumulate(block.force.begin(), block.force.end(), 0.0) / block.rate_hz;
  // 2/pi peak contact; noise of 0.3 N over 60 samples gives 0.05 %, the filter's ringing outside the window 0.1 %.
  CHECK(impulse == Approx(2.0 / std::acos(-1.0) * 800.0 * 0.005).epsilon(2e-3));
  CHECK(std::all_of(block.force.begin() + static_cast<std::ptrdiff_t>(block.contact_end) + 80, block.force.end(),
                    [](double x) { return x == 0.0; }));
}

TEST_CASE("a blow too close to the next and one at the end are refused") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.5;
  simulation.blows = {{2.0, 800.0, 0.005},  {10.0, 800.0, 0.005}, {11.0, 800.0, 0.005},
                      {19.0, 800.0, 0.005}, {27.0, 800.0, 0.005}, {34.0, 800.0, 0.005}};
  const auto reader = simulation.reader();
  const auto search = modal::find_hits(*reader, {}, {});
  REQUIRE(search.hits.size() == 6);
  CHECK(search.hits[0].used);
  CHECK(search.hits[1].verdict == HitVerdict::too_close);
  CHECK(search.hits[2].used);
  CHECK(search.hits[5].verdict == HitVerdict::cut_off);
  CHECK(has(search.findings, base::Code::short_decay));
}

TEST_CASE("a response beyond its range is an overload") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 20.0;
  simulation.blows = {{2.0, 800.0, 0.005}, {10.0, 800.0, 0.005}};
  simulation.response_full_scale = 5.0;
  const auto reader = simulation.reader();
  const auto search = modal::find_hits(*reader, {}, {});
  CHECK(search.blocks.empty());
  REQUIRE(search.hits.size() == 2);
  CHECK(search.hits[0].verdict == HitVerdict::overload);
}

TEST_CASE("clipping is told from a smooth peak in coarse numbers") {
  recording::Channel channel;
  std::vector<double> coarse;
  std::vector<double> clipped;
  for (int k = 0; k < 2000; ++k) {
    const double x = std::sin(0.005 * k);
    coarse.push_back(std::round(x / 1e-3) * 1e-3);
    clipped.push_back(std::min(x, 0.9));
  }
  CHECK(!modal::clipped_level(coarse, channel));
  CHECK(modal::clipped_level(clipped, channel));
}

TEST_CASE("blows are found in the response where there is no force channel") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 50.0;
  simulation.response_offset = -9.81;
  simulation.blows = tests::regular_blows(6, 8.0);
  const auto reader = simulation.reader();
  modal::HitOptions options;
  options.ignore_force = true;
  const auto search = modal::find_hits(*reader, options, {});
  REQUIRE(search.hits.size() == 6);
  for (std::size_t i = 0; i < 6; ++i) {
    CHECK(search.hits[i].used);
    CHECK(!search.hits[i].contact_s);
    CHECK(search.hits[i].time_s == Approx(simulation.blows[i].start_s).margin(0.003));
  }
  REQUIRE(!search.blocks.empty());
  CHECK(search.blocks.front().force.empty());
}

TEST_CASE("silence has no blows and noise has none either") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 10.0;
  const auto noisy = simulation.reader();
  CHECK(modal::find_hits(*noisy, {}, {}).hits.empty());
  simulation.force_noise = simulation.response_noise = 0.0;
  const auto silent = simulation.reader();
  CHECK(modal::find_hits(*silent, {}, {}).hits.empty());
}

TEST_CASE("a gap in the recording ends a block") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 40.0;
  simulation.blows = {{2.0, 800.0, 0.005}, {10.0, 800.0, 0.005}, {18.0, 800.0, 0.005}, {26.0, 800.0, 0.005}};
  const auto whole = simulation.reader();
  recording::Recording recording = whole->recording();
  const auto at = static_cast<std::int64_t>(10.4 * recording.rate_hz);
  recording.segments = {{0, at, 0.0}, {at, recording.frames - at, 10.4}};
  recording::Chunk chunk;
  std::vector<std::vector<double>> channels(2);
  whole->seek(0);
  while (whole->next(chunk, 4096)) {
    for (std::size_t c = 0; c < 2; ++c) {
      const auto samples = chunk.channel(c);
      channels[c].insert(channels[c].end(), samples.begin(), samples.end());
    }
  }
  const auto reader = tests::memory_reader(recording, channels);
  const auto search = modal::find_hits(*reader, {}, {});
  REQUIRE(search.hits.size() == 4);
  CHECK(search.hits[1].verdict == HitVerdict::cut_off);
  CHECK(search.blocks.size() == 3);
}

TEST_CASE("a channel that is not there is a wrong call") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 2.0;
  const auto reader = simulation.reader();
  modal::HitOptions options;
  options.force = 7;
  CHECK_THROWS_AS(modal::find_hits(*reader, options, {}), base::Error);
}
