#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/base/answer.hpp"
#include "stillmass/base/context.hpp"
#include "stillmass/base/finding.hpp"
#include "stillmass/spectral/calibrator.hpp"
#include "stillmass/survey/survey_file.hpp"

namespace stillmass::survey {

/// What one channel of a calibration recording gave.
struct ChannelCalibration {
  std::size_t recording = 0;  ///< position in Survey::recordings
  int index = 1;              ///< channel that is corrected
  std::string channel;        ///< its name
  std::string sensor;         ///< may be empty
  spectral::Calibration result;
  bool applied = false;  ///< false: too far from what the channel states, or no other recording has the sensor
  std::string text;      ///< one sentence: what was found and what was done with it
};

struct Calibrations {
  std::vector<ChannelCalibration> channels;
  std::vector<base::Finding> findings;  ///< `calibration_off`: a wrong level, a sensor whose settings differ
  std::vector<base::Refusal> refusals;  ///< no tone, no level accelerance
};

/// Evaluates the survey's calibration recordings (handheld calibrators first, then hung masses) and puts the
/// corrections into the settings of the channels of all other recordings: of the same sensor where both name one, else
/// of the same input, with the same scale or sensitivity stated. A channel whose scale is stated and that is off by
/// more than 10 % is not corrected: that is no drift but a mistake somewhere, which is said. A hung mass corrects the
/// hammer; in hammer tests with that hammer and sensor only the uncertainty of the ratio counts. Throws what the
/// readers throw, `Stopped`.
Calibrations apply_calibrations(Survey& survey, const base::Context& context);

}  // namespace stillmass::survey
