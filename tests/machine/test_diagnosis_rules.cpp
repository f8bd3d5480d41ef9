#include <algorithm>

#include "stillmass/machine/bearing.hpp"
#include "stillmass/machine/diagnosis.hpp"

#include "machine/diagnosis_facts.hpp"
#include "support/catch.hpp"

// Each rule on facts put together by hand: what it needs, what strengthens it, what takes it away.
using namespace stillmass;
using namespace stillmass::test;
using base::Code;
using base::Strength;

namespace {

std::vector<base::Finding> diagnose(const machine::Facts& facts) {
  return machine::diagnose(facts, machine::diagnosis_rules());
}

// Horizontal and vertical 1x at the motor's drive end.
machine::Facts two_ways(double horizontal, double vertical) {
  machine::Facts out = pump();
  add_channel(out, "motor-de-h", 1.1 * horizontal);
  add_channel(out, "motor-de-v", 1.1 * vertical);
  add_tone(out, 0, 24.63, horizontal);
  add_tone(out, 1, 24.63, vertical);
  return out;
}

// A pump bearing with tones of the envelope at multiples of its outer ring's frequency, 0.8 % slip.
machine::Facts beaten(int multiples, double depth, std::optional<double> kurtosis) {
  machine::Facts out = pump();
  out.machine.bearings = {{"6205", 9, 0.00794, 0.03904, 0.0, ""}};
  machine::ChannelFacts& channel = add_channel(out, "pump-de-v", 0.8e-3);
  channel.on_bearing_housing = true;
  channel.kurtosis = kurtosis;
  channel.envelope.emplace();
  const double outer = 0.992 * machine::bearing_orders(out.machine.bearings[0]).outer * 24.63;
  for (int k = 1; k <= multiples; ++k) channel.envelope->push_back({estimate(k * outer, 0.05), depth / k, {}, false});
  return out;
}

machine::Facts noisy(machine::MachineKind kind, double kurtosis) {
  machine::Facts out = pump();
  out.machine.kind = kind;
  machine::ChannelFacts& channel = add_channel(out, "pump-de-v", 2.0e-3);
  channel.acceleration = 11.0;
  channel.noise_acceleration = 10.0;
  channel.kurtosis = kurtosis;
  return out;
}

}  // namespace

TEST_CASE("halves and multiples of the running speed are looseness, many multiples alone no more than fair") {
  auto known = pump();
  add_channel(known, "pump-de-v", 6.0e-3);
  for (const double order : {1.0, 2.0, 3.0, 4.0, 5.0, 7.0, 8.0, 9.0, 10.0}) add_tone(known, 0, order * 24.63, 1.5e-3);
  REQUIRE(find(diagnose(known), Code::looseness) != nullptr);
  CHECK(find(diagnose(known), Code::looseness)->strength == Strength::fair);
  for (const double order : {0.5, 1.5}) add_tone(known, 0, order * 24.63, 1.0e-3);
  REQUIRE(find(diagnose(known), Code::looseness) != nullptr);
  CHECK(find(diagnose(known), Code::looseness)->strength == Strength::strong);
  CHECK(says(find(diagnose(known), Code::looseness)->confirm, "stopped and locked"));
  known.channels[0].smooth_limit = 7.0e-3;
  CHECK(find(diagnose(known), Code::looseness) == nullptr);
}

TEST_CASE("what slow roll and the growth with speed say of 1x counts for and against unbalance") {
  auto known = two_ways(6.0e-3, 5.0e-3);
  known.modes = {mode(60.0, 0.02)};
  add_channel(known, "motor-de-a", 1.0e-3);
  add_tone(known, 2, 24.63, 0.9e-3);
  add_phase(known, "motor-de-v", "motor-de-h", 88.0);
  REQUIRE(diagnose(known).size() == 1);
  REQUIRE(diagnose(known)[0].strength == Strength::strong);
  known.channels[0].run = machine::SpeedRun{estimate(2.1), 0.05, {}};
  known.channels[1].run = known.channels[0].run;
  CHECK(says(diagnose(known)[0].evidence, "to the power 2.1"));
  known.channels[0].run->slow_roll = 0.6;
  known.channels[1].run->slow_roll = 0.6;
  REQUIRE(find(diagnose(known), Code::unbalance) != nullptr);
  CHECK(find(diagnose(known), Code::unbalance)->strength == Strength::weak);
  CHECK(says(find(diagnose(known), Code::unbalance)->evidence, "60 % of 1x is there while it turns slowly"));
}

TEST_CASE("1x along one direction, to and fro, is a resonance suspected where no natural frequency is known") {
  auto known = two_ways(7.0e-3, 1.0e-3);
  REQUIRE(find(diagnose(known), Code::resonance) != nullptr);
  CHECK(find(diagnose(known), Code::resonance)->strength == Strength::weak);
  CHECK(find(diagnose(known), Code::unbalance)->strength == Strength::weak);
  add_phase(known, "motor-de-h", "motor-de-v", 172.0);
  CHECK(find(diagnose(known), Code::resonance)->strength == Strength::fair);
  CHECK(says(find(diagnose(known), Code::resonance)->evidence, "to and fro"));
  known.modes = {mode(80.0, 0.02)};  // looked for, and none is near
  CHECK(find(diagnose(known), Code::resonance) == nullptr);
}

TEST_CASE("1x along one direction with an electrical line is a soft foot suspected; loosening a bolt settles it") {
  auto known = two_ways(7.0e-3, 1.5e-3);
  add_tone(known, 0, 100.0, 2.0e-3);
  REQUIRE(find(diagnose(known), Code::soft_foot) != nullptr);
  CHECK(find(diagnose(known), Code::soft_foot)->strength == Strength::weak);
  CHECK(says(find(diagnose(known), Code::soft_foot)->confirm, "site's rules allow"));
  known.soft_foot = machine::TestOutcome::confirmed;
  CHECK(find(diagnose(known), Code::soft_foot)->strength == Strength::strong);
  known.soft_foot = machine::TestOutcome::refuted;
  CHECK(find(diagnose(known), Code::soft_foot) == nullptr);
}

TEST_CASE("a bearing's rhythm in the envelope is bearing damage, on a smooth machine too") {
  const auto found = diagnose(beaten(3, 0.6, 5.5));
  REQUIRE(find(found, Code::bearing_damage) != nullptr);
  CHECK(find(found, Code::bearing_damage)->strength == Strength::fair);  // every level is low
  CHECK(says(find(found, Code::bearing_damage)->evidence, "outer ring"));
  CHECK(says(find(found, Code::bearing_damage)->evidence, "runs smoothly"));
  auto rough = beaten(3, 0.6, 5.5);
  rough.channels[0].velocity = estimate(3.0e-3);
  CHECK(find(diagnose(rough), Code::bearing_damage)->strength == Strength::strong);
  CHECK(find(diagnose(beaten(1, 0.6, 5.5)), Code::bearing_damage)->strength == Strength::weak);
  CHECK(find(diagnose(beaten(3, 0.05, 5.5)), Code::bearing_damage) == nullptr);  // hardly modulated
  auto elsewhere = beaten(3, 0.6, 5.5);
  elsewhere.channels[0].bearings = {"another"};
  CHECK(find(diagnose(elsewhere), Code::bearing_damage) == nullptr);
  auto none = beaten(3, 0.6, 5.5);
  none.channels[0].envelope.reset();
  CHECK(find(diagnose(none), Code::bearing_damage) == nullptr);
}

TEST_CASE("envelope tones at multiples of the running speed are not a bearing's") {
  auto known = beaten(0, 0.6, 5.5);
  known.machine.bearings = {{"near 3x", 8, 0.0175, 0.073, 0.0, ""}};  // outer ring 3.04x
  for (int k = 1; k <= 8; ++k) known.channels[0].envelope->push_back({estimate(k * 24.63, 0.05), 0.5, {}, false});
  CHECK(find(diagnose(known), Code::bearing_damage) == nullptr);
}

TEST_CASE("noise in bursts at a pump is cavitation-like, never strong; at a fan or steady it is not") {
  const auto found = diagnose(noisy(machine::MachineKind::pump, 5.0));
  REQUIRE(find(found, Code::cavitation_like) != nullptr);
  CHECK(find(found, Code::cavitation_like)->strength == Strength::fair);
  CHECK(find(diagnose(noisy(machine::MachineKind::pump, 3.0)), Code::cavitation_like)->strength == Strength::weak);
  CHECK(find(diagnose(noisy(machine::MachineKind::fan, 5.0)), Code::cavitation_like) == nullptr);
}

TEST_CASE("a signed axis says its direction once the shaft's axis is known") {
  auto known = two_ways(6.0e-3, 5.0e-3);
  known.modes = {mode(60.0, 0.02)};
  add_channel(known, "motor-de-a", 1.0e-3);
  add_tone(known, 2, 24.63, 0.9e-3);
  add_phase(known, "motor-de-h", "motor-de-v", -88.0);
  known.channels[0].direction = "+y";
  known.channels[1].direction = "-z";
  known.channels[2].direction = "+x";
  CHECK(diagnose(known)[0].strength == Strength::fair);
  known.shaft_axis = 'x';
  CHECK(diagnose(known)[0].strength == Strength::strong);
}

TEST_CASE("phases against the tacho give the phase between two channels") {
  auto known = two_ways(6.0e-3, 5.0e-3);
  known.modes = {mode(60.0, 0.02)};
  add_phase(known, "motor-de-h", "", 40.0);
  add_phase(known, "motor-de-v", "", -48.0);
  CHECK(says(find(diagnose(known), Code::unbalance)->evidence, "88 degrees apart"));
}

TEST_CASE("the order of channels and tones changes nothing") {
  auto known = two_ways(7.0e-3, 1.5e-3);
  add_tone(known, 0, 100.0, 2.0e-3);
  add_tone(known, 1, 49.26, 3.0e-3);
  add_phase(known, "motor-de-h", "motor-de-v", 172.0);
  auto turned = known;
  std::reverse(turned.channels.begin(), turned.channels.end());
  for (auto& channel : turned.channels) std::reverse(channel.tones.begin(), channel.tones.end());
  const auto a = diagnose(known);
  const auto b = diagnose(turned);
  REQUIRE(a.size() == b.size());
  for (const base::Finding& each : a) {
    REQUIRE(find(b, each.code) != nullptr);
    CHECK(find(b, each.code)->strength == each.strength);
    CHECK(find(b, each.code)->text == each.text);
  }
}

TEST_CASE("nothing measured gives no finding") {
  CHECK(diagnose({}).empty());
  auto bare = pump();
  bare.channels.resize(3);
  CHECK(diagnose(bare).empty());
}
