#pragma once

#include "machine/simulated_machine.hpp"

namespace stillmass::test {

// The facts as a survey would find them: spectra, tones with their causes, levels, phases of 1x and 2x against the
// channel that moves most, kurtosis and the envelope above 1 kHz, from the samples of the machine.
machine::Facts measured_facts(const SimulatedMachine& from);

// The same without phases, natural frequencies and tests.
machine::Facts spectra_alone(machine::Facts facts);

}  // namespace stillmass::test
