#pragma once

#include <memory>
#include <vector>

#include "stillmass/survey/survey.hpp"

// What the recordings of the running machine tell together.
namespace stillmass::survey {

/// One a recording of the survey, in its order.
using Readers = std::vector<std::unique_ptr<recording::Reader>>;

step::Part part_of(const SurveyRecording& recording);

/// The spectra of one steady recording, with the modes, the verdicts of the check and the background of its stage.
step::SpectrumResult steady_spectrum(const SurveyResult& result, std::size_t recording, const Readers& readers,
                                     const base::Context& context);

/// The spectra that the diagnosis and the absorber start from: the first steady recording before that tells the speed,
/// else the first one; null without any.
const step::SpectrumResult* duty(const SurveyResult& result);

/// Every coast-down of a motor on the line, channel by channel: does the line at twice its frequency end with the
/// current? Those that cannot be tested are left out.
std::vector<Of<step::OtherTests::Cut>> power_cuts(const SurveyResult& result, const Readers& readers,
                                                  const base::Context& context);

/// Deflections over several steady recordings: joined by a reference that stayed, else magnitudes only of sensors
/// that were moved without one. Empty with one recording.
std::vector<step::OperatingDeflection> shapes(const SurveyResult& result);

/// What drives the vibration, with what the run and the power cut add: of every steady recording before, the loudest
/// first; of the same finding about the same line the strongest counts.
std::vector<base::Finding> diagnosis(const SurveyResult& result);

}  // namespace stillmass::survey
