#include "stillmass/machine/diagnosis.hpp"

#include "machine/diagnosis_facts.hpp"
#include "support/catch.hpp"

using namespace stillmass;
using namespace stillmass::test;
using base::Code;
using base::Strength;

namespace {

machine::Facts one_channel(double level = 7.0e-3) {
  machine::Facts out = pump();
  add_channel(out, "pump-h", level);
  return out;
}

// Horizontal, vertical and axial at one bearing, 1x in each.
machine::Facts one_bearing(double h, double v, double a) {
  machine::Facts out = pump();
  out.modes = {mode(60.0, 0.02)};
  const double sizes[] = {h, v, a};
  for (std::size_t i = 0; i < 3; ++i) {
    add_channel(out, std::string("pump-de-") + "hva"[i], 1.05 * sizes[i]);
    add_tone(out, i, 24.63, sizes[i]);
  }
  return out;
}

std::vector<base::Finding> diagnose(const machine::Facts& facts) {
  return machine::diagnose(facts, machine::diagnosis_rules());
}

}  // namespace

TEST_CASE("amplification is 1/(2 zeta) at the natural frequency, 1 far below, 1/|1 - r^2| beside") {
  CHECK(machine::amplification(25.0, 25.0, 0.02) == Approx(25.0));
  CHECK(machine::amplification(0.01, 25.0, 0.02) == Approx(1.0).epsilon(1e-6));
  CHECK(machine::amplification(50.0, 25.0, 0.0) == Approx(1.0 / 3.0));
  const auto range = machine::amplification_range(24.9, mode(25.0, 0.02, 0.1));
  CHECK(range.hi == Approx(25.0).epsilon(1e-3));  // the mode may stand on the line
  CHECK(range.lo == Approx(machine::amplification(24.9, 25.2, 0.02)));
}

TEST_CASE("1x that dominates, turns with the shaft, is hardly axial and far from every mode is unbalance") {
  auto known = one_bearing(6.5e-3, 5.5e-3, 1.0e-3);
  add_phase(known, "pump-de-v", "pump-de-h", 93.0);
  const auto findings = diagnose(known);
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::unbalance);
  CHECK(findings[0].strength == Strength::strong);
  CHECK(findings[0].channel == "pump-de-h");
  CHECK(findings[0].text == "1x at 24.63 Hz: 6.50 mm/s r.m.s., 95 % of the level there");
  CHECK(says(findings[0].evidence, "93 degrees apart"));
  CHECK(says(findings[0].confirm, "trial weight"));
  CHECK_FALSE(findings[0].refute.empty());
}

TEST_CASE("without a phase unbalance is no more than fair, and the finding says that phase tells it apart") {
  auto known = one_channel();
  known.modes = {mode(60.0, 0.02)};
  add_tone(known, 0, 24.63, 6.5e-3);
  const auto findings = diagnose(known);
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::unbalance);
  CHECK(findings[0].strength == Strength::fair);
  CHECK(findings[0].channel == "pump-h");
  CHECK(findings[0].text.find("93 %") != std::string::npos);
  CHECK(says(findings[0].confirm, "phase tells unbalance, misalignment and a bent shaft apart"));
}

TEST_CASE("a phase of low coherence does not count") {
  auto known = one_bearing(6.5e-3, 5.5e-3, 1.0e-3);
  add_phase(known, "pump-de-v", "pump-de-h", 93.0, 1.0, 0.5);
  CHECK(diagnose(known)[0].strength == Strength::fair);
}

TEST_CASE("1x close to a mode is a resonance first; its amplification and distance are stated") {
  auto known = one_channel();
  known.modes = {mode(25.3, 0.02)};
  add_tone(known, 0, 24.63, 6.5e-3);
  const auto findings = diagnose(known);
  REQUIRE(findings.size() == 2);
  CHECK(findings[0].code == Code::resonance);
  CHECK(findings[0].strength == Strength::strong);
  // r = .97352, 1 - r^2 = .05226, 2 zeta r = .03894: 15.3; (25.3 - 24.63) / 25.3 = 2.6 %
  CHECK(findings[0].text.find("amplification 15.3") != std::string::npos);
  CHECK(findings[0].text.find("2.6 %") != std::string::npos);
  CHECK(findings[1].code == Code::unbalance);
  CHECK(findings[1].strength == Strength::fair);
}

TEST_CASE("with no mode known, unbalance is no more than fair and says what to look for") {
  auto known = one_bearing(6.5e-3, 5.5e-3, 1.0e-3);
  known.modes.clear();
  add_phase(known, "pump-de-v", "pump-de-h", 93.0);
  const auto findings = diagnose(known);
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].strength == Strength::fair);
  CHECK(says(findings[0].confirm, "natural frequencies near running speed"));
}

TEST_CASE("vane pass and twice line frequency are named where they dominate") {
  auto vane = one_channel();
  vane.modes = {mode(60.0, 0.02)};
  add_tone(vane, 0, 6 * 24.63, 5.0e-3);
  const auto flow = diagnose(vane);
  CHECK(find(flow, Code::vane_pass_force) != nullptr);

  auto electrical = one_channel();
  electrical.modes = {mode(60.0, 0.02)};
  add_tone(electrical, 0, 100.0, 5.0e-3);
  const auto findings = diagnose(electrical);
  REQUIRE(find(findings, Code::electrical_force) != nullptr);
  CHECK(find(findings, Code::unbalance) == nullptr);
}

TEST_CASE("a power cut settles the electrical line: confirmed it is strong, refuted there is none") {
  auto known = one_channel();
  known.modes = {mode(60.0, 0.02)};
  add_tone(known, 0, 100.0, 6.0e-3);
  REQUIRE(find(diagnose(known), Code::electrical_force) != nullptr);
  CHECK(find(diagnose(known), Code::electrical_force)->strength == Strength::fair);
  CHECK(says(find(diagnose(known), Code::electrical_force)->confirm, "while the power is cut"));
  known.channels[0].power_cut = machine::TestOutcome::confirmed;
  REQUIRE(find(diagnose(known), Code::electrical_force) != nullptr);
  CHECK(find(diagnose(known), Code::electrical_force)->strength == Strength::strong);
  known.channels[0].power_cut = machine::TestOutcome::refuted;
  CHECK(find(diagnose(known), Code::electrical_force) == nullptr);
}

TEST_CASE("a small line makes no finding of force, and near a mode a weak one of resonance") {
  auto known = one_channel();
  known.modes = {mode(49.5, 0.02)};
  add_tone(known, 0, 49.26, 0.5e-3);
  const auto findings = diagnose(known);
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].code == Code::resonance);
  CHECK(findings[0].strength == Strength::weak);
}

TEST_CASE("a cause that is not certain makes the finding weak and says so") {
  machine::Facts known;
  known.machine.line_frequency_hz = 50.0;
  known.machine.motor_poles = 2;
  known.speed = estimate(49.8, 0.01);
  known.forcing = machine::forcing_frequencies(known.machine, *known.speed);
  known.modes = {mode(30.0, 0.02)};
  add_channel(known, "motor", 5.0e-3);
  machine::CausedTone tone{estimate(99.9, 0.05), estimate(4.5e-3), {}, false};
  tone.cause = machine::cause_of_peak(tone.frequency, 1.0, known.forcing);
  REQUIRE(tone.cause.ambiguous);
  known.channels[0].tones.push_back(tone);
  const auto findings = diagnose(known);
  REQUIRE(find(findings, Code::electrical_force) != nullptr);
  CHECK(find(findings, Code::electrical_force)->strength == Strength::weak);
  CHECK(says(find(findings, Code::electrical_force)->evidence, "not certain"));
  for (const auto& each : findings) CHECK(each.strength == Strength::weak);
}

TEST_CASE("a line that the stopped machine has too is never the machine's fault") {
  auto known = one_bearing(6.5e-3, 5.5e-3, 1.0e-3);
  for (auto& channel : known.channels) {
    for (auto& tone : channel.tones) tone.in_background = true;
  }
  CHECK(diagnose(known).empty());
}

TEST_CASE("on a machine whose levels are below their limits no fault is claimed") {
  auto known = one_channel(0.9e-3);  // below 1 mm/s, where no limit is known
  add_tone(known, 0, 24.63, 0.88e-3);
  CHECK(diagnose(known).empty());
  known = one_channel(2.2e-3);
  add_tone(known, 0, 24.63, 2.1e-3);
  CHECK_FALSE(diagnose(known).empty());
  known.channels[0].smooth_limit = 2.3e-3;
  CHECK(diagnose(known).empty());
}

TEST_CASE("a line below its limit on a smooth machine is no fault even where its pattern fits one") {
  auto known = pump();
  known.modes = {mode(60.0, 0.02)};
  for (std::size_t i = 0; i < 2; ++i) {
    add_channel(known, i == 0 ? "motor-nde-a" : "motor-de-a", 0.9e-3);
    add_tone(known, i, 24.63, 0.85e-3);
  }
  add_channel(known, "motor-nde-h", 0.9e-3);
  add_tone(known, 2, 24.63, 0.5e-3);
  add_phase(known, "motor-de-a", "motor-nde-a", 175.0);
  CHECK(diagnose(known).empty());
  known.channels[2].velocity = estimate(1.2e-3);  // rough elsewhere: then the pattern counts
  CHECK(find(diagnose(known), Code::bent_shaft) != nullptr);
}

TEST_CASE("two axial sensors at one place are not the two ends of a rotor") {
  auto known = pump();
  known.modes = {mode(60.0, 0.02)};
  for (std::size_t i = 0; i < 2; ++i) {
    add_channel(known, "motor-de-a", 5.0e-3).name += std::to_string(i);
    add_tone(known, i, 24.63, 4.8e-3);
  }
  add_channel(known, "motor-de-h", 5.0e-3);
  add_tone(known, 2, 24.63, 4.0e-3);
  add_phase(known, "motor-de-a0", "motor-de-a1", 175.0);
  REQUIRE(find(diagnose(known), Code::bent_shaft) != nullptr);
  CHECK(find(diagnose(known), Code::bent_shaft)->strength == Strength::weak);
}

TEST_CASE("axial 1x: opposite at the ends of a rotor is a bent shaft, opposite across the coupling misalignment") {
  auto known = pump();
  known.modes = {mode(60.0, 0.02)};
  const char* points[] = {"motor-nde-a", "motor-de-a", "pump-de-a", "pump-nde-a", "motor-de-h", "pump-de-h"};
  for (std::size_t i = 0; i < 6; ++i) {
    const double size = i < 4 ? 4.0e-3 : 3.0e-3;
    add_channel(known, points[i], 1.05 * size);
    add_tone(known, i, 24.63, size);
  }
  auto bent = known;
  add_phase(bent, "motor-de-a", "motor-nde-a", 172.0);
  auto found = diagnose(bent);
  REQUIRE(find(found, Code::bent_shaft) != nullptr);
  CHECK(find(found, Code::bent_shaft)->strength == Strength::strong);
  CHECK(find(found, Code::unbalance)->strength <= Strength::fair);

  auto askew = known;
  add_phase(askew, "motor-de-a", "pump-de-a", -165.0);
  add_phase(askew, "motor-nde-a", "pump-de-a", -160.0);
  found = diagnose(askew);
  REQUIRE(find(found, Code::misalignment) != nullptr);
  CHECK(find(found, Code::misalignment)->strength >= Strength::fair);
  CHECK(find(found, Code::bent_shaft)->strength == Strength::weak);

  // Without a phase the two look alike.
  found = diagnose(known);
  REQUIRE(find(found, Code::bent_shaft) != nullptr);
  REQUIRE(find(found, Code::misalignment) != nullptr);
  CHECK(find(found, Code::bent_shaft)->strength == Strength::weak);
  CHECK(find(found, Code::misalignment)->strength == Strength::weak);

  // One of the two axial sensors faces the other way: its direction says so.
  auto turned = bent;
  turned.channels[0].direction = "-axial";
  found = diagnose(turned);
  CHECK(find(found, Code::bent_shaft)->strength == Strength::weak);
}

TEST_CASE("the name of a point says its place, rotor and direction") {
  const auto a = machine::placed("pump-de-h");
  CHECK(a.place == "pump-de");
  CHECK(a.rotor == "pump");
  CHECK(a.direction == "horizontal");
  const auto b = machine::placed("Motor NDE axial");
  CHECK(b.place == "Motor NDE");
  CHECK(b.rotor == "Motor");
  CHECK(b.direction == "axial");
  const auto c = machine::placed("base");
  CHECK(c.place == "base");
  CHECK(c.rotor.empty());
  CHECK(c.direction.empty());
  CHECK(machine::placed("gear_3_v").rotor == "gear");
  CHECK(machine::placed("").place.empty());
  CHECK(machine::placed("-h").place.empty());
}
