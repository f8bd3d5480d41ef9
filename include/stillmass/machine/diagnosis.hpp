#pragma once

#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/machine/diagnosis_facts.hpp"
#include "stillmass/machine/diagnosis_rules.hpp"
#include "stillmass/modal/mode.hpp"

namespace stillmass::machine {

/// How much a mode multiplies the response to a force of constant amplitude: |1 / (1 - r^2 + i 2 zeta r)|, r = f / f_n.
double amplification(double frequency_hz, double natural_hz, double damping_ratio);
/// Least and greatest amplification while the mode's frequency lies within +- 2 u.
base::Interval amplification_range(double frequency_hz, const modal::Mode& mode);

/// Findings with evidence, strongest first: unbalance, misalignment, looseness, bent shaft, vane pass and electrical
/// forces, bearing damage, cavitation-like noise, soft foot, resonance. Each observation of a rule is held against the
/// facts; those that hold and those that speak against it stand in the evidence with their numbers, those that are not
/// known as what to measure, in `confirm`. Strength: the weights of what holds less those of what contradicts, held
/// against the row's points, then the row's caps. One finding for a code (for a bearing, for a line with a mode): on
/// the channel where it is strongest, then where its line is largest. Lines of the background never count. On a machine
/// that runs smoothly (every level below its limit) only those rules speak that say so.
std::vector<base::Finding> diagnose(const Facts& facts, const DiagnosisRules& rules);

}  // namespace stillmass::machine
