#pragma once

#include <algorithm>
#include <cstddef>
#include <string>

#include "stillmass/simulate/skid_file.hpp"
#include "stillmass/simulate/truth.hpp"
#include "stillmass/survey/survey.hpp"

#include "support/catch.hpp"
#include "support/demo.hpp"

// The demo: the virtual skid, its exact values, and the survey of its recordings, each made once a program.
namespace stillmass::tests {

inline const simulate::SkidFile& skid() {
  static const simulate::SkidFile file = simulate::read_skid_file(demo_file("skid.toml"));
  return file;
}

inline const simulate::Truth& truth() {
  static const simulate::Truth exact = simulate::truth_of(skid());
  return exact;
}

inline const survey::SurveyResult& result() {
  static const survey::SurveyResult found = survey::run(survey::read_survey(demo_file("survey.toml")), {});
  return found;
}

inline std::size_t point_of(const std::string& name) {
  const auto& points = truth().points;
  const auto at = std::find(points.begin(), points.end(), name);
  REQUIRE(at != points.end());
  return static_cast<std::size_t>(at - points.begin());
}

}  // namespace stillmass::tests
