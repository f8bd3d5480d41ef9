#include <algorithm>
#include <cmath>

#include "stillmass/base/error.hpp"
#include "stillmass/modal/impact_test.hpp"

#include "modal/hammer_simulation.hpp"
#include "support/catch.hpp"

using namespace stillmass;

namespace {

modal::HitSearch hits_of(const tests::HammerSimulation& simulation) {
  const auto reader = simulation.reader();
  return modal::find_hits(*reader, {}, {});
}

base::Answer<modal::ImpactTest> tested(const tests::HammerSimulation& simulation, const base::Context& context = {}) {
  const modal::HitSearch search = hits_of(simulation);
  return modal::impact_test(search.blocks, modal::options_for(search), context);
}

bool has(const std::vector<base::Finding>& findings, base::Code code) {
  return std::ranges::any_of(findings, [&](const base::Finding& f) { return f.code == code; });
}

}  // namespace

TEST_CASE("a hammer test with its imperfections gives frequency, damping and modal mass of every mode") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 64.0;
  simulation.response_noise = 0.02;
  simulation.blows = tests::regular_blows(7, 8.0);
  simulation.blows.push_back({simulation.blows[2].start_s + 0.07, 250.0, 0.005});
  simulation.blows[4].peak_n = 3000.0;
  const auto test = tested(simulation);
  REQUIRE(test);
  CHECK(test->hits == 5);
  CHECK(test->driving_point == 0U);
  CHECK(test->decay_per_s == 0.0);
  REQUIRE(test->modes.size() == 4);
  for (std::size_t r = 0; r < 4; ++r) {
    const modal::Mode& mode = test->modes[r];
    const oracle::OneDegree& truth = simulation.modes[r];
    // Ten times better than what a field test must reach (0.5 %, 15 %, 10 %).
    CHECK(mode.frequency.value == Approx(truth.frequency_hz).epsilon(5e-4));
    CHECK(mode.damping_ratio.value == Approx(truth.damping_ratio).epsilon(0.015));
    REQUIRE(mode.modal_mass);
    CHECK(mode.modal_mass->value == Approx(truth.mass_kg).epsilon(0.01));
    CHECK(mode.frequency.u);
    CHECK(mode.point == "p2");
    CHECK(mode.state == "stopped");
    CHECK(mode.methods.front().name == "curve fit");
  }
  for (std::size_t r = 0; r < 4; ++r) {
    REQUIRE(test->modes[r].methods.size() == 2);
    CHECK(test->modes[r].methods[1].name == "half-power bandwidth");
    CHECK(test->modes[r].methods[1].damping_ratio.value == Approx(simulation.modes[r].damping_ratio).epsilon(0.03));
  }
  CHECK(test->responses[0].coherence.size() == test->responses[0].accelerance.size());
  CHECK(test->findings.empty());
}

TEST_CASE("the averaged accelerance is that of the structure, with a positive imaginary part at resonance") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.0;
  simulation.blows = tests::regular_blows(4, 8.0);
  const auto test = tested(simulation);
  REQUIRE(test);
  for (const double f : {15.0, 24.2, 31.5, 58.0, 75.0, 91.0}) {
    const auto k = static_cast<std::size_t>(std::llround(f / test->line_hz));
    const auto truth = oracle::accelerance(simulation.modes, static_cast<double>(k) * test->line_hz);
    // Noise of 0.004 m/s2 over 8 s against 2 N s: 1e-4 (m/s2)/N, three times that.
    CHECK(std::abs(test->responses[0].accelerance[k] - truth) < 3e-4 + 1e-3 * std::abs(truth));
    CHECK(std::abs(test->responses[0].fitted[k] - truth) < 3e-4 + 1e-3 * std::abs(truth));
  }
  const auto peak = static_cast<std::size_t>(std::llround(24.2 / test->line_hz));
  CHECK(test->responses[0].accelerance[peak].imag() == Approx(1.0 / (2.0 * 0.01 * 210.0)).epsilon(0.02));
}

TEST_CASE("a response that outlasts the block is windowed and loses no truth by it") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 20.0;
  simulation.modes = {{24.2, 0.004, 210.0}, {58.0, 0.012, 150.0}};
  simulation.shapes = {{1.0, 1.0}};
  simulation.blows = tests::regular_blows(8, 2.2);
  const auto test = tested(simulation);
  REQUIRE(test);
  CHECK(test->decay_per_s > 0.5);
  CHECK(has(test->findings, base::Code::short_decay));
  REQUIRE(test->modes.size() == 2);
  // What is left of the blow before (a quarter of the peak) acts as noise that differs from hit to hit.
  CHECK(test->modes[0].frequency.value == Approx(24.2).epsilon(2e-3));
  CHECK(test->modes[0].damping_ratio.value == Approx(0.004).epsilon(0.25));
  CHECK(test->modes[0].frequency.interval95()->contains(24.2));
  CHECK(test->modes[0].damping_ratio.interval95()->contains(0.004));
  CHECK(test->modes[0].modal_mass->interval95()->contains(210.0));
}

TEST_CASE("points on the other side move in opposite phase, and one unknown driving point means no mass") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.0;
  simulation.rate_hz = 1024.0;
  simulation.shapes = {{1.0, 1.0, 1.0, 1.0}, {-0.5, 1.5, 0.4, -0.8}};
  simulation.blows = tests::regular_blows(4, 8.0);
  const modal::HitSearch search = hits_of(simulation);
  modal::ImpactTestOptions options = modal::options_for(search);
  const auto test = modal::impact_test(search.blocks, options, {});
  REQUIRE(test);
  REQUIRE(test->modes.size() == 4);
  const auto& shape = test->modes[0].shape;
  REQUIRE(shape.size() == 2);
  CHECK(shape[1].point == "p3");
  CHECK(shape[1].ratio == Approx(0.5).epsilon(0.01));
  CHECK(shape[1].phase_deg == Approx(180.0).margin(1.0));
  CHECK(test->modes[0].modal_mass->value == Approx(210.0).epsilon(0.01));

  // Seen from p3 the modal mass is m (phi_p / phi_a)^2, but the blow fell on p2: there is none to be had there.
  options.force_point.clear();
  const auto unknown = modal::impact_test(search.blocks, options, {});
  REQUIRE(unknown);
  CHECK(!unknown->modes[0].modal_mass);
  options.driving_point = "nowhere";
  CHECK_THROWS_AS(modal::impact_test(search.blocks, options, {}), base::Error);
}

TEST_CASE("calibration uncertainty goes into the mass and into nothing else") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.0;
  simulation.rate_hz = 1024.0;
  simulation.blows = tests::regular_blows(4, 8.0);
  const modal::HitSearch search = hits_of(simulation);
  modal::ImpactTestOptions options = modal::options_for(search);
  const auto plain = modal::impact_test(search.blocks, options, {});
  options.force_factor_u = 0.03;
  options.responses[0].factor_u = 0.04;
  const auto calibrated = modal::impact_test(search.blocks, options, {});
  REQUIRE(plain);
  REQUIRE(calibrated);
  CHECK(*calibrated->modes[0].modal_mass->relative() == Approx(0.05).epsilon(0.01));
  CHECK(*calibrated->modes[0].frequency.u == *plain->modes[0].frequency.u);
}

TEST_CASE("a single hit has values and no uncertainty") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 10.0;
  simulation.blows = {{1.0, 800.0, 0.005}};
  const auto test = tested(simulation);
  REQUIRE(test);
  REQUIRE(test->modes.size() == 4);
  CHECK(test->modes[0].frequency.value == Approx(24.2).epsilon(1e-3));
  CHECK(!test->modes[0].frequency.u);
  CHECK(!test->modes[0].modal_mass->u);
  CHECK(test->responses[0].coherence.empty());
}

TEST_CASE("no usable hit and no resonance are refused with what to measure") {
  const auto none = modal::impact_test({}, {}, {});
  REQUIRE(!none);
  CHECK(none.refusal().code == "no-usable-hit");
  CHECK(none.refusal().measure.find("strike again") != std::string::npos);

  tests::HammerSimulation simulation;  // a rigid block on very soft springs: nothing between 20 and 100 Hz
  simulation.duration_s = 34.0;
  simulation.rate_hz = 1024.0;
  simulation.modes = {{2.0, 0.2, 500.0}};
  simulation.shapes = {{1.0}};
  simulation.blows = tests::regular_blows(4, 8.0);
  const modal::HitSearch search = hits_of(simulation);
  modal::ImpactTestOptions options = modal::options_for(search);
  options.band_hz = base::Interval{20.0, 100.0};
  const auto rigid = modal::impact_test(search.blocks, options, {});
  REQUIRE(!rigid);
  CHECK(rigid.refusal().code == "no-mode");
}

TEST_CASE("one and four threads give the same bits") {
  tests::HammerSimulation simulation;
  simulation.duration_s = 34.0;
  simulation.rate_hz = 1024.0;
  simulation.blows = tests::regular_blows(4, 8.0);
  base::Context four;
  four.threads = 4;
  const auto a = tested(simulation);
  const auto b = tested(simulation, four);
  REQUIRE(a);
  REQUIRE(b);
  for (std::size_t r = 0; r < a->modes.size(); ++r) {
    CHECK(a->modes[r].damping_ratio.value == b->modes[r].damping_ratio.value);
    CHECK(*a->modes[r].modal_mass->u == *b->modes[r].modal_mass->u);
  }
}

TEST_CASE("intervals of simulated tests hold the truth about as often as they say") {
  constexpr int trials = 60;
  int inside[3] = {};
  for (int trial = 1; trial <= trials; ++trial) {
    tests::HammerSimulation simulation;
    simulation.rate_hz = 512.0;
    simulation.response_noise = 0.1;
    simulation.duration_s = 34.0;
    simulation.seed = static_cast<std::uint64_t>(trial);
    simulation.blows = tests::regular_blows(4, 8.0, static_cast<std::uint64_t>(trial));
    const auto test = tested(simulation);
    REQUIRE(test);
    REQUIRE(test->modes.size() == 4);
    const modal::Mode& mode = test->modes[0];
    const auto holds = [](const base::Estimate& e, double truth) {
      return std::abs(e.value - truth) <= 2.0 * *base::widened(e.u, e.dof);
    };
    inside[0] += holds(mode.frequency, 24.2);
    inside[1] += holds(mode.damping_ratio, 0.010);
    inside[2] += holds(*mode.modal_mass, 210.0);
  }
  // 95 % of 60 is 57; 51 (85 %) is three standard deviations below.
  for (const int count : inside) CHECK(count >= 51);
}
