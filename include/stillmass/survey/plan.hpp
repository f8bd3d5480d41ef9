#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stillmass/survey/survey_file.hpp"

namespace stillmass::survey {

/// What to measure, from what the survey file says of the machine. Absent: the machine's data do not tell.
struct Plan {
  double rate_hz = 0.0;            ///< of every recording, at least
  double highest_hz = 0.0;         ///< that must be seen
  double steady_s = 0.0;           ///< of the running machine at its duty
  std::optional<double> hammer_s;  ///< between two blows
  int hammer_blows = 0;
  std::optional<double> hammer_reach_hz;  ///< the force must reach up to here: it decides the tip
  std::optional<double> contact_s;        ///< of a half-sine blow that reaches so far
  std::optional<double> trial_mass_kg;    ///< to bolt on where there is no hammer with a force sensor
  /// For each absorber site with a mass bound and a known machine mass: the least mass ratio there can be (all of the
  /// machine moving), and what follows.
  struct Bound {
    std::string point;
    double least_mass_ratio = 0.0;
    double least_split = 0.0;   ///< relative distance of the new natural frequencies, undamped, tuned to the mode
    double highest_peak = 0.0;  ///< of a damped absorber at its best, over the static deflection
  };
  std::vector<Bound> bounds;
  std::vector<std::string> unknown;  ///< keys of the survey file that would sharpen the plan
};

/// Rates: 2.56 times the highest frequency of interest (the band of severity, twice the vane pass), steady recordings:
/// 64 blocks of 1 s lines; hammer: until a mode at half the running speed with 0.5 % damping has died to 1 %; force
/// down by 10 dB at four times the running speed. All of it common practice.
Plan measuring_plan(const Survey& survey);

}  // namespace stillmass::survey
