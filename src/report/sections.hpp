#pragma once

#include <string>
#include <vector>

#include "stillmass/report/envelope.hpp"
#include "stillmass/report/page.hpp"
#include "stillmass/report/terminal.hpp"
#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"

namespace stillmass::report {

/// Pieces that the pages of the commands and of the survey share.
std::vector<Block> check_blocks(const step::CheckResult& result);
std::vector<Block> spectrum_blocks(const step::SpectrumResult& result, const SpectrumView& view);
/// How the machine moves at its forcing frequencies: a table.
std::vector<Block> deflection_blocks(const std::vector<step::OperatingDeflection>& shapes);
/// What drives the machine: each finding with its evidence, and what would confirm or refute it.
std::vector<Block> cause_blocks(const std::vector<base::Finding>& causes);
std::vector<Block> bump_blocks(const step::BumpResult& result);
std::vector<Block> runup_blocks(const step::RunupResult& result);
std::vector<Block> absorber_blocks(const step::AbsorberResult& result, const std::string& point,
                                   const std::string& direction);
Table mode_table(const std::vector<modal::Mode>& modes);
/// Findings with their cause and next step.
std::vector<Block> finding_blocks(const std::vector<base::Finding>& findings);
/// Files, formats, hashes.
Section inputs_section(const Envelope& envelope);
std::vector<std::pair<std::string, std::string>> facts(const Envelope& envelope);
Tone tone_of(step::Verdict verdict);

}  // namespace stillmass::report
