#include <algorithm>
#include <cmath>

#include "stillmass/machine/diagnosis.hpp"

#include "support/catch.hpp"

using namespace stillmass;
using base::Code;
using base::Strength;

namespace {

base::Estimate estimate(double value, std::optional<double> u = {}) {
  base::Estimate out;
  out.value = value;
  out.u = u;
  return out;
}

modal::Mode mode(double frequency, double zeta, double u = 0.05) {
  modal::Mode out;
  out.frequency = estimate(frequency, u);
  out.damping_ratio = estimate(zeta);
  out.state = "running";
  return out;
}

// A four-pole pump at 24.63 Hz with 6 vanes; one channel.
machine::Facts facts() {
  machine::Facts out;
  out.machine.line_frequency_hz = 50.0;
  out.machine.motor_poles = 4;
  out.machine.vanes = 6;
  out.forcing = machine::forcing_frequencies(out.machine, estimate(24.63, 0.01));
  out.levels = {{"pump-h", 7.0e-3}};
  return out;
}

void add_peak(machine::Facts& to, double frequency, double velocity) {
  machine::CausedPeak peak;
  peak.channel = "pump-h";
  peak.peak = {estimate(frequency, 0.02), velocity};
  peak.cause = machine::cause_of_peak(peak.peak.frequency, 0.25, to.forcing, to.modes);
  to.peaks.push_back(peak);
}

const base::Finding* find(const std::vector<base::Finding>& list, Code code) {
  const auto at = std::find_if(list.begin(), list.end(), [&](const auto& each) { return each.code == code; });
  return at == list.end() ? nullptr : &*at;
}

}  // namespace

TEST_CASE("every rule has its limit, and strong is above fair") {
  const auto rules = machine::diagnosis_rules();
  CHECK(rules.dominance_strong > rules.dominance_fair);
  CHECK(rules.amplification_strong > rules.amplification_fair);
  CHECK(rules.near_bandwidths > 0.0);
}

TEST_CASE("amplification is 1/(2 zeta) at the natural frequency, 1 far below, 1/|1 - r^2| beside") {
  CHECK(machine::amplification(25.0, 25.0, 0.02) == Approx(25.0));
  CHECK(machine::amplification(0.01, 25.0, 0.02) == Approx(1.0).epsilon(1e-6));
  CHECK(machine::amplification(50.0, 25.0, 0.0) == Approx(1.0 / 3.0));
  const auto range = machine::amplification_range(24.9, mode(25.0, 0.02, 0.1));
  CHECK(range.hi == Approx(25.0).epsilon(1e-3));  // the mode may stand on the line
  CHECK(range.lo == Approx(machine::amplification(24.9, 25.2, 0.02)));
}

TEST_CASE("1x that dominates far from every mode is unbalance") {
  auto known = facts();
  known.modes = {mode(60.0, 0.02)};
  add_peak(known, 24.63, 6.5e-3);
  const auto findings = machine::diagnose(known, machine::diagnosis_rules());
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::unbalance);
  CHECK(findings[0].strength == Strength::strong);
  CHECK(findings[0].channel == "pump-h");
  CHECK(findings[0].text.find("93 %") != std::string::npos);
}

TEST_CASE("1x close to a mode is a resonance first; its amplification and distance are stated") {
  auto known = facts();
  known.modes = {mode(25.3, 0.02)};
  add_peak(known, 24.63, 6.5e-3);
  const auto findings = machine::diagnose(known, machine::diagnosis_rules());
  REQUIRE(findings.size() == 2);
  CHECK(findings[0].code == Code::resonance);
  CHECK(findings[0].strength == Strength::strong);
  // r = .97352, 1 - r^2 = .05226, 2 zeta r = .03894: 15.3; (25.3 - 24.63) / 25.3 = 2.6 %
  CHECK(findings[0].text.find("amplification 15.3") != std::string::npos);
  CHECK(findings[0].text.find("2.6 %") != std::string::npos);
  CHECK(findings[1].code == Code::unbalance);
  CHECK(findings[1].strength == Strength::fair);
}

TEST_CASE("with no mode known, unbalance is no more than fair") {
  auto known = facts();
  add_peak(known, 24.63, 6.5e-3);
  const auto findings = machine::diagnose(known, machine::diagnosis_rules());
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].strength == Strength::fair);
}

TEST_CASE("vane pass and twice line frequency are named where they dominate") {
  auto vane = facts();
  vane.modes = {mode(60.0, 0.02)};
  add_peak(vane, 6 * 24.63, 5.0e-3);
  const auto flow = machine::diagnose(vane, machine::diagnosis_rules());
  CHECK(find(flow, Code::vane_pass_force) != nullptr);

  auto electrical = facts();
  electrical.modes = {mode(60.0, 0.02)};
  add_peak(electrical, 100.0, 5.0e-3);
  const auto findings = machine::diagnose(electrical, machine::diagnosis_rules());
  REQUIRE(find(findings, Code::electrical_force) != nullptr);
  CHECK(find(findings, Code::unbalance) == nullptr);
}

TEST_CASE("a small line makes no finding of force, and near a mode a weak one of resonance") {
  auto known = facts();
  known.modes = {mode(49.5, 0.02)};
  add_peak(known, 49.26, 0.5e-3);
  const auto findings = machine::diagnose(known, machine::diagnosis_rules());
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::resonance);
  CHECK(findings[0].strength == Strength::weak);
}

TEST_CASE("a cause that is not certain makes the finding weak and says so") {
  machine::Facts known;
  known.machine.line_frequency_hz = 50.0;
  known.machine.motor_poles = 2;
  known.forcing = machine::forcing_frequencies(known.machine, estimate(49.8, 0.01));
  known.levels = {{"motor", 5.0e-3}};
  known.modes = {mode(30.0, 0.02)};
  machine::CausedPeak peak{"motor", {estimate(99.9, 0.05), 4.5e-3}, {}};
  peak.cause = machine::cause_of_peak(peak.peak.frequency, 1.0, known.forcing);
  REQUIRE(peak.cause.ambiguous);
  known.peaks.push_back(peak);
  const auto findings = machine::diagnose(known, machine::diagnosis_rules());
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::electrical_force);
  CHECK(findings[0].strength == Strength::weak);
  CHECK(findings[0].evidence.back().find("not certain") != std::string::npos);
}
