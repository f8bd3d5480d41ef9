#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/modal/hits.hpp"
#include "stillmass/modal/impact_test.hpp"
#include "stillmass/modal/mode.hpp"
#include "stillmass/modal/ring_down_test.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/step/part.hpp"

namespace stillmass::step {

/// The same test with a known mass bolted on at the driving point.
struct AddedMassTest {
  double mass_kg = 0.0;
  recording::Reader* reader = nullptr;
};

struct BumpRequest {
  Part part;                              ///< of each recording
  std::string driving_point;              ///< empty: the point of the force channel, else the first response
  std::optional<base::Interval> band_hz;  ///< modes are sought here
  std::optional<double> max_frequency_hz;
  std::string state = "stopped";
  std::vector<AddedMassTest> added_masses;
};

struct FileHit {
  std::string file;
  modal::Hit hit;
};

struct BumpResult {
  std::vector<recording::Recording> recordings;
  std::vector<FileHit> hits;
  std::optional<modal::ImpactTest> impact;       ///< with a force channel
  std::optional<modal::RingDownTest> ring_down;  ///< without
  std::vector<modal::Mode> modes;                ///< by frequency
  std::optional<base::Refusal> refusal;          ///< why there are no modes
  std::vector<base::Finding> findings;
};

/// Hammer tests of one set-up (all recordings with the same channels), or ring-downs without a hammer's force.
/// With added masses the modal mass also follows from the fall of each natural frequency; where a mode has no modal
/// mass yet (no force channel) that one is taken. Throws what the readers throw, `Stopped`, and `Error` (usage) for
/// recordings whose channels or rates differ.
BumpResult bump(const std::vector<recording::Reader*>& readers, const BumpRequest& request,
                const base::Context& context);

}  // namespace stillmass::step
