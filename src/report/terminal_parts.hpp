#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "stillmass/base/finding.hpp"
#include "stillmass/recording/recording.hpp"

// Pieces that the texts of the commands share.
namespace stillmass::report {

inline constexpr std::size_t screen = 100;  ///< columns

/// File, format, channels, rate, duration.
std::string heading(const recording::Recording& recording);
std::string bullet(const std::string& text);
/// One bullet a finding; an assumption has no likely cause.
std::string finding_lines(const std::vector<base::Finding>& findings, bool with_cause = true);
/// What drives the machine, one bullet each: finding, code, strength.
std::string cause_headlines(const std::vector<base::Finding>& findings);
/// The same with the evidence, and what would confirm or refute each.
std::string cause_lines(const std::vector<base::Finding>& findings);

}  // namespace stillmass::report
