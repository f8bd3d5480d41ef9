#include <algorithm>
#include <cmath>

#include "stillmass/modal/ring_down_test.hpp"

#include "modal/hammer_simulation.hpp"
#include "support/catch.hpp"
#include "support/demo.hpp"

using namespace stillmass;

namespace {

modal::HitSearch ring_downs(const tests::HammerSimulation& simulation) {
  const auto reader = simulation.reader();
  modal::HitOptions options;
  options.ignore_force = true;
  return modal::find_hits(*reader, options, {});
}

}  // namespace

TEST_CASE("ring-downs without a force channel give frequency and damping") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 50.0;
  simulation.response_noise = 0.02;
  simulation.response_offset = -9.81;
  simulation.blows = tests::regular_blows(6, 8.0);
  const modal::HitSearch search = ring_downs(simulation);
  modal::RingDownOptions options;
  options.responses = search.responses;
  options.max_frequency_hz = 150.0;
  const auto test = modal::ring_down_test(search.blocks, options, {});
  REQUIRE(test);
  REQUIRE(test->modes.size() == 4);
  for (std::size_t r = 0; r < 4; ++r) {
    const modal::Mode& mode = test->modes[r];
    CHECK(mode.frequency.value == Approx(simulation.modes[r].frequency_hz).epsilon(5e-4));
    CHECK(mode.damping_ratio.value == Approx(simulation.modes[r].damping_ratio).epsilon(0.03));
    CHECK(!mode.modal_mass);
    CHECK(*mode.frequency.dof == 5.0);
    CHECK(mode.point == "p2");
  }
  REQUIRE(test->modes[2].methods.size() == 2);
  CHECK(test->modes[2].methods[1].name == "logarithmic decrement");
  CHECK(test->modes[2].methods[1].damping_ratio.value == Approx(0.012).epsilon(0.05));
}

TEST_CASE("no ring-down and no mode in the band are refused") {
  CHECK(modal::ring_down_test({}, {}, {}).refusal().code == "no-usable-hit");
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.0;
  simulation.blows = tests::regular_blows(4, 8.0);
  const modal::HitSearch search = ring_downs(simulation);
  modal::RingDownOptions options;
  options.band_hz = base::Interval{120.0, 160.0};
  const auto test = modal::ring_down_test(search.blocks, options, {});
  REQUIRE(!test);
  CHECK(test.refusal().code == "no-mode");
}

TEST_CASE("a measured blow on a footbridge has the bridge's natural frequencies") {
  // Natural frequencies near 12.0 and 17.5 Hz: README of the measured recordings.
  const auto file = tests::measured_recording("footbridge-blow-node.csv");
  if (!file) {
    WARN("skipped: no measured recordings here");
    return;
  }
  recording::OpenOptions open;
  recording::ChannelSetting setting;
  setting.unit = *base::unit_named("g");
  open.channels = {setting};
  const auto reader = recording::open(*file, open);
  const modal::HitSearch search = modal::find_hits(*reader, {}, {});
  REQUIRE(!search.blocks.empty());
  modal::RingDownOptions options;
  options.band_hz = base::Interval{8.0, 25.0};
  const auto test = modal::ring_down_test(search.blocks, options, {});
  REQUIRE(test);
  const auto near = [&](double f) {
    return std::ranges::any_of(test->modes,
                               [&](const modal::Mode& m) { return std::abs(m.frequency.value - f) < 0.3; });
  };
  CHECK(near(12.0));
  CHECK(near(17.5));
}
