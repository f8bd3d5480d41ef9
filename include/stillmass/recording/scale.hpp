#pragma once

#include <filesystem>
#include <span>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/channel.hpp"

namespace stillmass::recording {

/// SI units per 1.0 of the stored sample, for a channel in `unit`:
///   scale given:        scale * unit.to_si
///   sensitivity given:  full_scale_v * 1000 / sensitivity_mv_per_unit * unit.to_si
///   neither:            unit.to_si
/// Throws `Error` (usage) for a scale or sensitivity that is zero or not finite, a full scale that is not positive, one
/// of sensitivity and full scale without the other, or both ways at once. `where` goes into the error.
double si_factor(const ChannelSetting& setting, const base::Unit& unit, const std::string& where);

/// Puts what the user says over what the file says, and fills in what neither says: the role from the unit (a tacho
/// signal, a force; else vibration), the unit where nothing is known (m/s2, for a force N; `unit_known` stays false,
/// with a finding `unit_assumed`, except for a tacho). Stored step and full scale, which come in per 1.0 of the stored
/// sample, leave in SI. Throws `Error` (usage) for a channel that is not there or is given twice, and what `si_factor`
/// throws.
void apply_settings(std::vector<Channel>& channels, std::span<const ChannelSetting> settings,
                    const std::filesystem::path& file, std::vector<base::Finding>& findings);

}  // namespace stillmass::recording
