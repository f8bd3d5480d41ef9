#pragma once

#include <array>
#include <filesystem>
#include <optional>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/base/interval.hpp"
#include "stillmass/base/settings.hpp"
#include "stillmass/machine/description.hpp"
#include "stillmass/recording/reader.hpp"
#include "stillmass/spectral/calibrator.hpp"

namespace stillmass::survey {

enum class Kind { steady, runup, coastdown, stepped, bump, ringdown, background, calibration, ratio_calibration };
std::string_view name(Kind kind);

enum class Stage { before, after, bench, blocked };
std::string_view name(Stage stage);

/// Where and in which direction a sensor sat on the machine.
struct Point {
  std::string name;
  std::string direction;  ///< "horizontal", "vertical", "axial", or a signed axis "+x"; may be empty
  std::string on;         ///< "bearing-housing", "structure", "piping", "absorber"; empty: not said
  std::optional<std::array<double, 3>> position_m;
};

/// A recording of the visit, with what the survey file says of it.
struct SurveyRecording {
  std::filesystem::path file;  ///< as it can be opened from here
  std::string written;         ///< as the survey file writes it
  Kind kind = Kind::steady;
  Stage stage = Stage::before;
  bool running = true;
  std::optional<double> speed_hz;
  std::optional<base::Interval> part_s;         ///< only this part of it
  std::optional<double> added_mass_kg;          ///< a known mass was bolted on
  recording::OpenOptions open;                  ///< channels and rate
  spectral::CalibratorTone calibrator;          ///< of a calibration
  std::optional<spectral::HungMass> hung_mass;  ///< of a ratio calibration
  int pulses_per_turn = 1;
  bool falling_edge = false;
  int line = 1;  ///< in the survey file
};

/// What counts as good enough.
struct Limit {
  std::string standard;  ///< "ISO 10816-7"; may be empty
  std::string category;  ///< "I", "II", a group or class; may be empty
  std::optional<double> shaft_height_m;
  std::optional<double> target_m_s;   ///< broad-band r.m.s. velocity
  std::optional<double> alarm_m_s{};  ///< from which somebody must look
  std::optional<double> trip_m_s{};   ///< from which the machine is stopped
};

/// A place where an absorber could be attached, and what is allowed there.
struct AbsorberSite {
  std::string point;
  std::vector<std::string> axes;
  std::optional<double> max_mass_kg;
  std::optional<double> max_travel_m;
  std::optional<base::Interval> temperature_c;
};

/// One visit.
struct Survey {
  std::filesystem::path file;
  machine::Machine machine;
  std::vector<Point> points;
  std::vector<SurveyRecording> recordings;
  std::vector<Limit> limits;
  std::vector<AbsorberSite> absorbers;

  /// Null where there is none of that name.
  const Point* point(std::string_view name) const;
};

/// Every key of a survey file, once: type, unit, default, meaning. README's reference is made from it.
std::span<const base::Key> survey_keys();

/// Reads and checks a survey file: keys, types, ranges, names that must match (a channel's point, an absorber's point),
/// recordings that must exist. Throws `Error` of kind `usage` with file and line.
Survey read_survey(const std::filesystem::path& file);

}  // namespace stillmass::survey
