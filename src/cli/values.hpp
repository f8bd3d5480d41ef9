#pragma once

#include <optional>
#include <string>
#include <string_view>

#include "stillmass/base/estimate.hpp"
#include "stillmass/base/interval.hpp"
#include "stillmass/recording/channel.hpp"

namespace stillmass::cli {

/// A value as the command line writes it, in the unit of the option.
struct UncertainNumber {
  double value = 0.0;
  std::optional<double> u;
};

/// "25.3" or "25.3+-0.05" (u above 0).
std::optional<UncertainNumber> parse_estimate(std::string_view text);
/// "LO:HI" with LO not above HI.
std::optional<base::Interval> parse_range(std::string_view text);

/// "INDEX=NAME[:UNIT[*SCALE]]". Call `broken_channel` first: it says what is wrong, or nothing.
recording::ChannelSetting parse_channel(std::string_view text);
std::string broken_channel(std::string_view text);

struct AddedMass {
  double kg = 0.0;
  std::string file;
};
/// "KG=FILE".
std::optional<AddedMass> parse_added_mass(std::string_view text);

}  // namespace stillmass::cli
