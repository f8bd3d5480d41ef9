#pragma once

#include <array>
#include <cstdint>
#include <string>
#include <vector>

#include "stillmass/machine/diagnosis_facts.hpp"

// Motor and pump with four bearings, three directions each, shaken by textbook models of faults: a generator of its own
// for the tests of the diagnosis. What each fault does is common practice as the trade's textbooks and ISO 13373-1 tell
// it (from memory): see simulated_machine.cpp.
namespace stillmass::test {

enum class Fault {
  unbalance,
  parallel_misalignment,
  angular_misalignment,
  looseness,
  bent_shaft,
  vane_pass,
  electrical,
  bearing,
  cavitation,
  soft_foot,
  resonance,
};
inline constexpr std::size_t fault_count = 11;

struct FaultSize {
  Fault fault = Fault::unbalance;
  double size = 0.0;  // m/s r.m.s. of the leading line; of bearing and cavitation m/s2 (height of a blow; r.m.s.)
};

struct SimulatedChannel {
  std::string point;                 // "pump-de-h"
  std::vector<double> acceleration;  // m/s2
};

struct SimulatedMachine {
  machine::Machine machine;
  double speed_hz = 0.0;
  double rate_hz = 8192.0;
  double smooth_limit = 0.0;  // zone A/B, m/s; 0: not known
  std::vector<SimulatedChannel> channels;
  std::vector<modal::Mode> modes;
  machine::TestOutcome power_cut = machine::TestOutcome::not_made;
  machine::TestOutcome soft_foot = machine::TestOutcome::not_made;
};

// A machine with these faults; none: healthy, with small lines of every kind and noise, its levels from well below to
// above the limit. `healthy_scale` multiplies what a healthy machine does.
SimulatedMachine simulated(std::uint64_t seed, const std::vector<FaultSize>& faults, double healthy_scale = 1.0);

}  // namespace stillmass::test
