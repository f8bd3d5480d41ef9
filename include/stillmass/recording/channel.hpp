#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "stillmass/base/unit.hpp"

namespace stillmass::recording {

enum class Role { vibration, force, tacho };
std::string_view name(Role role);

/// One signal of a recording. SI sample = stored sample * factor + offset.
struct Channel {
  int index = 1;  ///< 1-based, as in the file; a time column is not counted
  std::string name;
  Role role = Role::vibration;
  std::string point;                  ///< name of the measuring point; may be empty
  std::string direction;              ///< free text or signed axis; may be empty
  base::Unit unit;                    ///< unit of the calibrated signal as the user or the file states it
  bool unit_known = false;            ///< false: nothing said the unit, the numbers are those of the file
  double factor = 1.0;                ///< SI units per 1.0 of the stored sample; negative: inverted polarity
  double offset = 0.0;                ///< SI units
  std::optional<double> factor_u;     ///< relative standard uncertainty of the factor, where a calibration gave it
  std::optional<double> stored_step;  ///< SI units per least step of the stored sample (integer files)
  std::optional<double> full_scale;   ///< SI units at full scale of the stored sample (integer files)
};

/// What a calibration says of a channel: its factor is multiplied by it.
struct Correction {
  double factor = 1.0;
  double relative_u = 0.0;         ///< standard uncertainty of the corrected factor
  std::optional<base::Unit> unit;  ///< the unit from now on, where the channel's own was that of the recorder (V)
};

/// What a user says of a channel; whatever is absent is taken from the file.
struct ChannelSetting {
  int index = 1;
  std::optional<std::string> name;
  std::optional<Role> role;
  std::optional<base::Unit> unit;
  std::optional<double> scale;  ///< units (of `unit`) per 1.0 of the stored sample; negative: inverted
  std::optional<double> sensitivity_mv_per_unit;  ///< with full_scale_v, instead of scale
  std::optional<double> full_scale_v;
  std::string point;
  std::string direction;
  std::string sensor;                    ///< which one: calibrations follow it; empty: whatever is on this input
  std::optional<Correction> correction;  ///< from a calibration recording
};

}  // namespace stillmass::recording
