#include "stillmass/recording/scale.hpp"

#include <cmath>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"
#include "stillmass/base/number.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::recording {
namespace {

const ChannelSetting* setting_of(int index, std::span<const ChannelSetting> settings) {
  for (const ChannelSetting& setting : settings) {
    if (setting.index == index) return &setting;
  }
  return nullptr;
}

void check_indices(std::size_t channels, std::span<const ChannelSetting> settings, const std::string& where) {
  for (std::size_t i = 0; i < settings.size(); ++i) {
    const int index = settings[i].index;
    if (index < 1 || static_cast<std::size_t>(index) > channels) {
      throw base::usage_error(where,
                              fmt::format("channel {} is not there, the recording has {} channel{}", index, channels,
                                          channels == 1 ? "" : "s"),
                              "channels are counted from 1, a time column is not counted");
    }
    if (setting_of(index, settings) != &settings[i]) {
      throw base::usage_error(where, fmt::format("channel {} is described twice", index), "describe it once");
    }
  }
}

Role role_of(const base::Unit& unit) {
  if (unit.quantity == base::Quantity::pulse) return Role::tacho;
  if (unit.quantity == base::Quantity::force) return Role::force;
  return Role::vibration;
}

base::Unit assumed_unit(Role role) {
  switch (role) {
    case Role::force:
      return base::si_unit(base::Quantity::force);
    case Role::tacho:
      return base::si_unit(base::Quantity::pulse);
    case Role::vibration:
      break;
  }
  return base::si_unit(base::Quantity::acceleration);
}

void apply(Channel& channel, const ChannelSetting& setting, const std::string& where) {
  if (setting.name) channel.name = *setting.name;
  channel.point = setting.point;
  channel.direction = setting.direction;
  if (setting.unit) {
    channel.unit = *setting.unit;
    channel.unit_known = true;
  }
  if (setting.sensitivity_mv_per_unit && !channel.unit_known) {
    throw base::usage_error(where, fmt::format("channel {} has a sensitivity but no unit", channel.index),
                            "say which unit the sensitivity is for");
  }
  if (setting.role) {
    channel.role = *setting.role;
  } else if (channel.unit_known) {
    channel.role = role_of(channel.unit);
  }
  if (!channel.unit_known) channel.unit = assumed_unit(channel.role);
  channel.factor = si_factor(setting, channel.unit, fmt::format("{}: channel {}", where, channel.index));
  if (!setting.correction) return;
  channel.factor *= setting.correction->factor;
  channel.factor_u = setting.correction->relative_u;
  if (setting.correction->unit) {
    channel.unit = *setting.correction->unit;
    channel.unit_known = true;
    channel.role = setting.role.value_or(role_of(channel.unit));
  }
}

}  // namespace

double si_factor(const ChannelSetting& setting, const base::Unit& unit, const std::string& where) {
  const auto usable = [](double value) { return std::isfinite(value) && value != 0.0; };
  if (setting.scale) {
    if (setting.sensitivity_mv_per_unit || setting.full_scale_v) {
      throw base::usage_error(where, "both a scale and a sensitivity are given", "give one of them");
    }
    if (!usable(*setting.scale)) {
      throw base::usage_error(where, fmt::format("the scale {} is not a number other than 0", *setting.scale),
                              "give units per 1.0 of the stored sample");
    }
    return *setting.scale * unit.to_si;
  }
  if (setting.sensitivity_mv_per_unit.has_value() != setting.full_scale_v.has_value()) {
    throw base::usage_error(where, "sensitivity and full scale belong together",
                            "give sensitivity_mv_per_unit and full_scale_v, or a scale");
  }
  if (!setting.sensitivity_mv_per_unit) return unit.to_si;
  if (!usable(*setting.sensitivity_mv_per_unit)) {
    throw base::usage_error(where, "the sensitivity is not a number other than 0", "give mV per unit");
  }
  if (!(usable(*setting.full_scale_v) && *setting.full_scale_v > 0.0)) {
    throw base::usage_error(where, "the full scale is not a positive number", "give the recorder's range in V");
  }
  return *setting.full_scale_v * 1000.0 / *setting.sensitivity_mv_per_unit * unit.to_si;
}

void apply_settings(std::vector<Channel>& channels, std::span<const ChannelSetting> settings,
                    const std::filesystem::path& file, std::vector<base::Finding>& findings) {
  const std::string where = base::printable(file.string());
  check_indices(channels.size(), settings, where);
  for (Channel& channel : channels) {
    const ChannelSetting* setting = setting_of(channel.index, settings);
    ChannelSetting nothing_said;
    nothing_said.index = channel.index;
    apply(channel, setting != nullptr ? *setting : nothing_said, where);
    if (channel.stored_step) *channel.stored_step *= std::abs(channel.factor);
    if (channel.full_scale) *channel.full_scale *= std::abs(channel.factor);
    if (!channel.unit_known && channel.role != Role::tacho) {
      const bool states_other = channel.name.ends_with(')') || channel.name.ends_with(']');
      base::Finding finding{
          base::Code::unit_assumed,
          fmt::format(fmt::runtime(states_other ? "the unit in its name is none known here; its numbers are taken as {}"
                                                : "nothing says its unit; its numbers are taken as {}"),
                      channel.unit.name),
          channel.name};
      findings.push_back(std::move(finding));
    }
  }
}

}  // namespace stillmass::recording
