#include "cli/values.hpp"

#include <utility>

#include "stillmass/base/number.hpp"

namespace stillmass::cli {
namespace {

struct ChannelParts {
  std::string_view index, name, unit, scale;
  bool complete = false;
};

ChannelParts parts_of(std::string_view text) {
  ChannelParts parts;
  const auto equals = text.find('=');
  if (equals == std::string_view::npos) return parts;
  parts.complete = true;
  parts.index = text.substr(0, equals);
  text.remove_prefix(equals + 1);
  const auto colon = text.rfind(':');
  parts.name = text.substr(0, colon);
  if (colon == std::string_view::npos) return parts;
  text.remove_prefix(colon + 1);
  const auto star = text.find('*');
  parts.unit = text.substr(0, star);
  if (star != std::string_view::npos) parts.scale = text.substr(star + 1);
  return parts;
}

}  // namespace

std::optional<UncertainNumber> parse_estimate(std::string_view text) {
  const auto sign = text.find("+-");
  const auto value = base::parse_number(text.substr(0, sign));
  if (!value) return {};
  if (sign == std::string_view::npos) return UncertainNumber{*value, {}};
  const auto u = base::parse_number(text.substr(sign + 2));
  if (!u || *u <= 0.0) return {};
  return UncertainNumber{*value, u};
}

std::optional<base::Interval> parse_range(std::string_view text) {
  const auto colon = text.find(':');
  if (colon == std::string_view::npos) return {};
  const auto lo = base::parse_number(text.substr(0, colon));
  const auto hi = base::parse_number(text.substr(colon + 1));
  if (!lo || !hi || *lo > *hi) return {};
  return base::Interval{*lo, *hi};
}

std::string broken_channel(std::string_view text) {
  const ChannelParts parts = parts_of(text);
  if (!parts.complete) return "must be INDEX=NAME[:UNIT[*SCALE]]";
  const auto index = base::parse_integer(parts.index);
  if (!index || *index < 1 || *index > 1024) return "must begin with a channel index from 1";
  if (parts.name.empty()) return "names no channel";
  const bool asks_unit = parts.unit.data() != nullptr;
  if (asks_unit && !base::unit_named(parts.unit)) {
    return "has the unknown unit '" + std::string(parts.unit) +
           "'; one of g, m/s2, mm/s, m/s, um, mm, m, N, V, 1, tacho";
  }
  if (parts.scale.data() != nullptr) {
    const auto scale = base::parse_number(parts.scale);
    if (!scale || *scale == 0.0) return "has a scale that is not a number other than 0";
  }
  return {};
}

recording::ChannelSetting parse_channel(std::string_view text) {
  const ChannelParts parts = parts_of(text);
  recording::ChannelSetting setting;
  setting.index = static_cast<int>(base::parse_integer(parts.index).value_or(1));
  setting.name = std::string(parts.name);
  if (parts.unit.data() != nullptr) setting.unit = base::unit_named(parts.unit);
  if (parts.scale.data() != nullptr) setting.scale = base::parse_number(parts.scale);
  return setting;
}

std::optional<AddedMass> parse_added_mass(std::string_view text) {
  const auto equals = text.find('=');
  if (equals == std::string_view::npos || equals + 1 == text.size()) return {};
  const auto kg = base::parse_number(text.substr(0, equals));
  if (!kg || *kg <= 0.0) return {};
  return AddedMass{*kg, std::string(text.substr(equals + 1))};
}

}  // namespace stillmass::cli
