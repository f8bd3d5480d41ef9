#include <algorithm>
#include <array>
#include <cstdio>
#include <map>
#include <string>

#include "stillmass/machine/diagnosis.hpp"

#include "machine/diagnosis_facts.hpp"
#include "machine/measured_facts.hpp"
#include "support/catch.hpp"

// How often the diagnosis is right and wrong on simulated machines (simulated_machine.hpp). Limits and seeds are here;
// `test_machine "[.rates]"` prints the whole table of twice as many, `"[.example]"` the findings of one machine.
using namespace stillmass;
using namespace stillmass::test;
using base::Code;
using base::Strength;

namespace {

// The table was tuned on the seeds 1000 to 9999; these machines it had not seen.
constexpr std::uint64_t first_fault_seed = 21000;
constexpr std::uint64_t first_pair_seed = 25000;
constexpr std::uint64_t first_healthy_seed = 29000;
constexpr int fault_seeds = 4;  // times three sizes
constexpr int pair_seeds = 3;
constexpr int healthy_machines = 120;

struct Expected {
  Fault fault;
  const char* name;
  Code code;
  std::vector<double> sizes;   // mm/s r.m.s., of bearing and cavitation m/s2
  double least_fair;           // of the machines: found at least fair where everything was measured
  Strength most_alone;         // no stronger from spectra alone
  std::vector<Code> confused;  // what else it looks like, and may be called at least fair too
};

const std::vector<Expected>& expected() {
  using enum Code;
  static const std::vector<Expected> out = {
      {Fault::unbalance, "unbalance", unbalance, {3, 5, 8}, 0.75, Strength::fair, {}},
      {Fault::parallel_misalignment,
       "parallel misalignment",
       misalignment,
       {3, 5, 8},
       0.9,
       Strength::fair,
       {unbalance}},
      {Fault::angular_misalignment, "angular misalignment", misalignment, {3, 5, 8}, 0.9, Strength::fair, {}},
      {Fault::looseness, "looseness", looseness, {3, 5, 8}, 0.9, Strength::strong, {unbalance}},
      {Fault::bent_shaft, "bent shaft", bent_shaft, {3, 5, 8}, 0.75, Strength::weak, {}},
      {Fault::vane_pass, "vane pass", vane_pass_force, {3, 5, 8}, 0.75, Strength::fair, {}},
      {Fault::electrical, "electrical", electrical_force, {3, 5, 8}, 0.75, Strength::fair, {}},
      {Fault::bearing, "bearing", bearing_damage, {10, 20, 40}, 0.9, Strength::strong, {}},
      {Fault::cavitation, "cavitation", cavitation_like, {8, 12, 20}, 0.25, Strength::fair, {}},
      {Fault::soft_foot, "soft foot", soft_foot, {3, 5, 8}, 0.6, Strength::weak, {electrical_force}},
      {Fault::resonance, "resonance", resonance, {3, 5, 8}, 0.9, Strength::fair, {}},
  };
  return out;
}

double in_si(Fault fault, double size) {
  return fault == Fault::bearing || fault == Fault::cavitation ? size : 1e-3 * size;
}

// What was found with everything measured, and with spectra alone.
struct Both {
  std::vector<base::Finding> all;
  std::vector<base::Finding> alone;
};
Both findings(std::uint64_t seed, const std::vector<FaultSize>& faults) {
  static const machine::DiagnosisRules rules = machine::diagnosis_rules();
  const machine::Facts facts = measured_facts(simulated(seed, faults));
  return {machine::diagnose(facts, rules), machine::diagnose(spectra_alone(facts), rules)};
}

bool found(const std::vector<base::Finding>& list, Code code, Strength least) {
  const base::Finding* at = find(list, code);
  return at != nullptr && at->strength >= least;
}

// How often each code came out, at least weak, fair, strong.
struct Counts {
  int machines = 0;
  std::map<Code, std::array<int, 3>> of;
  std::array<int, 3> any{};  // machines with a finding of that strength or more

  void add(const std::vector<base::Finding>& list) {
    ++machines;
    for (int s = 0; s < 3; ++s) {
      any[static_cast<std::size_t>(s)] +=
          std::any_of(list.begin(), list.end(), [&](const auto& each) { return static_cast<int>(each.strength) >= s; });
    }
    for (std::size_t c = 0; c < base::all_codes().size(); ++c) {
      const Code code = base::all_codes()[c].code;
      for (int s = 0; s < 3; ++s) {
        if (found(list, code, static_cast<Strength>(s))) ++of[code][static_cast<std::size_t>(s)];
      }
    }
  }
  double rate(Code code, Strength least) const {
    const auto at = of.find(code);
    return at == of.end() ? 0.0 : static_cast<double>(at->second[static_cast<std::size_t>(least)]) / machines;
  }
  std::string text() const {
    std::string out = " any " + std::to_string(any[0]) + "/" + std::to_string(any[1]) + "/" + std::to_string(any[2]);
    for (const auto& [code, count] : of) {
      out += "  " + std::string(base::text(code).name) + " " + std::to_string(count[0]) + "/" +
             std::to_string(count[1]) + "/" + std::to_string(count[2]);
    }
    return out;
  }
};

struct BothCounts {
  Counts all;
  Counts alone;

  void add(const Both& found) {
    all.add(found.all);
    alone.add(found.alone);
  }
};

BothCounts with_fault(const Expected& fault, int seeds) {
  BothCounts out;
  for (int i = 0; i < seeds; ++i) {
    for (const double size : fault.sizes) {
      const auto seed =
          first_fault_seed + 100 * static_cast<std::uint64_t>(fault.fault) + static_cast<std::uint64_t>(i);
      out.add(findings(seed, {{fault.fault, in_si(fault.fault, size)}}));
    }
  }
  return out;
}

BothCounts healthy(int machines) {
  BothCounts out;
  for (int i = 0; i < machines; ++i) out.add(findings(first_healthy_seed + static_cast<std::uint64_t>(i), {}));
  return out;
}

struct FaultPair {
  Fault first;
  Fault second;
};
constexpr auto fault_pairs = std::to_array<FaultPair>({
    {Fault::unbalance, Fault::parallel_misalignment},
    {Fault::unbalance, Fault::vane_pass},
    {Fault::unbalance, Fault::electrical},
    {Fault::unbalance, Fault::bearing},
    {Fault::angular_misalignment, Fault::vane_pass},
    {Fault::parallel_misalignment, Fault::bearing},
    {Fault::looseness, Fault::electrical},
    {Fault::looseness, Fault::vane_pass},
    {Fault::bent_shaft, Fault::vane_pass},
    {Fault::bent_shaft, Fault::electrical},
    {Fault::electrical, Fault::bearing},
    {Fault::vane_pass, Fault::cavitation},
    {Fault::bearing, Fault::cavitation},
    {Fault::resonance, Fault::vane_pass},
    {Fault::resonance, Fault::electrical},
    {Fault::unbalance, Fault::looseness},
});

const Expected& expected(Fault fault) { return expected()[static_cast<std::size_t>(fault)]; }

// Both faults of the middle size.
BothCounts with_pair(const FaultPair& pair, int seeds) {
  BothCounts out;
  const auto middle = [](Fault fault) { return FaultSize{fault, in_si(fault, expected(fault).sizes[1])}; };
  for (int i = 0; i < seeds; ++i) {
    const auto seed =
        first_pair_seed + 100 * static_cast<std::uint64_t>(&pair - fault_pairs.data()) + static_cast<std::uint64_t>(i);
    out.add(findings(seed, {middle(pair.first), middle(pair.second)}));
  }
  return out;
}

void print(const char* name, const BothCounts& counts) {
  std::printf("%-22s %3d\n  all measured: %s\n  spectra alone:%s\n", name, counts.all.machines,
              counts.all.text().c_str(), counts.alone.text().c_str());
}

}  // namespace

TEST_CASE("every single fault is found, and is rarely called another", "[simulated]") {
  for (const Expected& fault : expected()) {
    CAPTURE(fault.name);
    const BothCounts counts = with_fault(fault, fault_seeds);
    INFO("all measured: " << counts.all.text() << "\nspectra alone: " << counts.alone.text());
    CHECK(counts.all.rate(fault.code, Strength::weak) >= (fault.fault == Fault::soft_foot ? 0.6 : 0.9));
    CHECK(counts.all.rate(fault.code, Strength::fair) >= fault.least_fair);
    CHECK(counts.alone.rate(fault.code, Strength::weak) >= (fault.fault == Fault::soft_foot ? 0.6 : 0.9));
    if (fault.most_alone < Strength::strong) CHECK(counts.alone.rate(fault.code, Strength::strong) == 0.0);
    if (fault.most_alone < Strength::fair) CHECK(counts.alone.rate(fault.code, Strength::fair) <= 0.15);
    for (const base::CodeText& other : base::all_codes()) {
      // The simulated mode stands at random among the multiples of the speed: a line near it is no false finding.
      if (other.code == fault.code || other.code == Code::resonance) continue;
      CAPTURE(other.name);
      CHECK(counts.all.rate(other.code, Strength::strong) == 0.0);
      const bool alike = std::find(fault.confused.begin(), fault.confused.end(), other.code) != fault.confused.end();
      // Of 12 machines; another compiler's rounding draws others, of which a resonance had 4 called unbalance.
      if (!alike) CHECK(counts.all.rate(other.code, Strength::fair) <= 0.34);
    }
  }
}

TEST_CASE("of two faults at once both come out", "[simulated]") {
  for (const FaultPair& pair : fault_pairs) {
    CAPTURE(expected(pair.first).name, expected(pair.second).name);
    const BothCounts counts = with_pair(pair, pair_seeds);
    INFO("all measured: " << counts.all.text() << "\nspectra alone: " << counts.alone.text());
    for (const Fault fault : {pair.first, pair.second}) {
      CAPTURE(expected(fault).name);
      CHECK(counts.all.rate(expected(fault).code, Strength::weak) == 1.0);
      CHECK(counts.all.rate(expected(fault).code, Strength::fair) >= 0.6);
      CHECK(counts.alone.rate(expected(fault).code, Strength::weak) == 1.0);
    }
  }
}

TEST_CASE("of healthy machines at most 2 % get a finding that is fair or strong", "[simulated]") {
  const BothCounts counts = healthy(healthy_machines);
  INFO("all measured: " << counts.all.text() << "\nspectra alone: " << counts.alone.text());
  const auto share = [](const Counts& of, Strength least) {
    return static_cast<double>(of.any[static_cast<std::size_t>(least)]) / of.machines;
  };
  CHECK(share(counts.all, Strength::fair) <= 0.02);
  CHECK(share(counts.all, Strength::strong) <= 0.01);
  CHECK(share(counts.all, Strength::weak) <= 0.15);
  CHECK(share(counts.alone, Strength::fair) <= 0.02);
  CHECK(share(counts.alone, Strength::weak) <= 0.08);
}

TEST_CASE("rates of every single fault, of pairs and of healthy machines, for people", "[.rates]") {
  std::printf("found of machines: at least weak/fair/strong\n");
  for (const Expected& fault : expected()) print(fault.name, with_fault(fault, 2 * fault_seeds));
  for (const FaultPair& pair : fault_pairs) {
    const std::string name = std::string(expected(pair.first).name) + " + " + expected(pair.second).name;
    print(name.c_str(), with_pair(pair, 2 * pair_seeds));
  }
  print("healthy", healthy(400));
}

TEST_CASE("the findings of one machine, for people", "[.example]") {
  const Both found = findings(first_pair_seed, {{Fault::unbalance, 5e-3}, {Fault::bearing, 30.0}});
  for (const auto& list : {found.all, found.alone}) {
    for (const base::Finding& each : list) {
      std::printf("\n%s (%s) at %s: %s\n", std::string(base::text(each.code).name).c_str(),
                  std::string(base::name(each.strength)).c_str(), each.channel.c_str(), each.text.c_str());
      for (const auto& line : each.evidence) std::printf("  seen: %s\n", line.c_str());
      for (const auto& line : each.confirm) std::printf("  confirm: %s\n", line.c_str());
      for (const auto& line : each.refute) std::printf("  refute: %s\n", line.c_str());
    }
    std::printf("\n");
  }
}
