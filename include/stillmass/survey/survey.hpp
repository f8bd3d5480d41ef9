#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <vector>

#include "stillmass/absorber/fitted.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/step/absorber.hpp"
#include "stillmass/step/bump.hpp"
#include "stillmass/step/check.hpp"
#include "stillmass/step/diagnosis.hpp"
#include "stillmass/step/runup.hpp"
#include "stillmass/step/spectrum.hpp"
#include "stillmass/survey/calibrations.hpp"
#include "stillmass/survey/survey_file.hpp"

namespace stillmass::survey {

/// A result and the recording of the survey (its position in `Survey::recordings`) that it came from.
template <class Result>
struct Of {
  std::size_t recording = 0;
  Result result;
};

/// The vibration at one point before and after the absorber was fitted.
struct AfterPoint {
  std::string point;
  base::Interval band_hz;
  base::Estimate before;  ///< broad-band r.m.s. velocity, m/s
  base::Estimate after;
  std::optional<base::Estimate> predicted;         ///< what the specification expected
  std::optional<base::Estimate> component_before;  ///< the forcing line alone
  std::optional<base::Estimate> component_after;
  absorber::Achieved achieved;
  std::optional<bool> meets_target;
};

/// Which line and which mode the absorber is for.
struct AbsorberAim {
  AbsorberSite site;
  std::size_t mode = 0;    ///< position in SurveyResult::modes
  base::Estimate forcing;  ///< Hz
  std::string forcing_name;
  step::AbsorberResult result;
};

/// Everything that one visit tells.
struct SurveyResult {
  Survey survey;  ///< with the corrections of the calibrations in it
  Calibrations calibrations;
  std::vector<Of<step::CheckResult>> quality;
  std::vector<Of<step::SpectrumResult>> spectra;  ///< steady recordings, in the order of the file
  std::vector<step::BumpResult> bumps;
  std::vector<modal::Mode> modes;
  std::vector<Of<step::RunupResult>> runups;
  std::vector<Of<step::OtherTests::Cut>> power_cuts;  ///< of the coast-downs, one a vibration channel
  std::vector<step::OperatingDeflection> shapes;      ///< of several recordings as one: roved sensors
  std::optional<double> target_m_s;                   ///< asked for, or the limit B/C of the standard
  bool target_from_standard = false;
  std::vector<base::Finding> findings;  ///< of the machine and of the chain, strongest first
  std::vector<base::Refusal> refusals;  ///< questions that the recordings do not answer
  std::vector<AbsorberAim> absorbers;
  std::vector<AfterPoint> after;
};

/// The main job: calibrations applied, every recording judged, then hammer tests, spectra, run-ups, diagnosis,
/// absorber, and what the fitted absorber achieved. A question that the data cannot answer becomes a refusal and the
/// rest goes on. Throws what the readers throw (a recording that cannot be read), `Stopped`, and `Error` (usage).
SurveyResult run(const Survey& survey, const base::Context& context);

/// Of every point (or channel without one) the steady recording of the running machine, in that stage, in which it
/// moved most; in the order in which they appear.
std::vector<const step::ChannelSpectrum*> loudest(const SurveyResult& result, Stage stage);

/// The recording of the stopped machine with its neighbours running: of that stage, else the first; null without any.
const SurveyRecording* background_of(const Survey& survey, Stage stage);

/// The site of the survey as the single commands need it.
step::Site site_of(const Survey& survey);

}  // namespace stillmass::survey
