#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/machine/diagnosis_facts.hpp"
#include "stillmass/rotation/power_cut.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"

namespace stillmass::step {

/// What other recordings of the visit tell of a channel.
struct OtherTests {
  const RunupResult* run = nullptr;  ///< a run-up or coast-down
  struct Cut {
    std::string channel;
    rotation::PowerCut result;
  };
  std::vector<Cut> power_cuts;
};

/// The facts for the rules of `machine/diagnosis`, from one spectrum and what else is known.
machine::Facts facts_of(const SpectrumResult& spectra, const Site& site, const std::vector<modal::Mode>& modes,
                        const OtherTests& others = {});

/// The machine's findings, strongest first; none where nothing is said of the machine.
std::vector<base::Finding> diagnosed(const SpectrumResult& spectra, const Site& site,
                                     const std::vector<modal::Mode>& modes, const OtherTests& others = {});

}  // namespace stillmass::step
