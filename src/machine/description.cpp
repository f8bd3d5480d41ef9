#include "stillmass/machine/description.hpp"

#include <array>
#include <cmath>
#include <numbers>

#include <fmt/format.h>

#include "stillmass/base/error.hpp"

namespace stillmass::machine {
namespace {

// The names of an enumeration in the order of its values.
template <class Enum, std::size_t N>
std::optional<Enum> named(const std::array<std::string_view, N>& names, std::string_view wanted) {
  for (std::size_t i = 0; i < N; ++i) {
    if (names[i] == wanted) return static_cast<Enum>(i);
  }
  return {};
}

constexpr std::array<std::string_view, 4> kinds = {"pump", "fan", "motor", "general"};
constexpr std::array<std::string_view, 2> supplies = {"line", "drive"};
constexpr std::array<std::string_view, 2> supports = {"flexible", "rigid"};

constexpr double rigid_from = 1.25;  // times the main forcing frequency (public summary of IS 14817-3)
constexpr double doubtful = 0.05;    // around it, for a frequency without uncertainty (common practice)

}  // namespace

std::string_view name(MachineKind kind) { return kinds[static_cast<std::size_t>(kind)]; }
std::optional<MachineKind> kind_named(std::string_view name) { return named<MachineKind>(kinds, name); }
std::string_view name(Supply supply) { return supplies[static_cast<std::size_t>(supply)]; }
std::optional<Supply> supply_named(std::string_view name) { return named<Supply>(supplies, name); }
std::string_view name(Support support) { return supports[static_cast<std::size_t>(support)]; }
std::optional<Support> support_named(std::string_view name) { return named<Support>(supports, name); }

std::optional<Support> Machine::support(std::string_view direction) const {
  for (const DirectionSupport& each : foundation_by_direction) {
    if (each.direction == direction) return each.support;
  }
  return foundation;
}

std::optional<double> Machine::shaft_ratio(std::string_view shaft) const {
  if (shaft.empty()) return 1.0;
  for (const Shaft& each : shafts) {
    if (each.name == shaft) return each.ratio;
  }
  return {};
}

double Machine::shaft_ratio_u(std::string_view shaft) const {
  for (const Shaft& each : shafts) {
    if (each.name == shaft) return each.ratio_u;
  }
  return 0.0;
}

std::optional<double> Machine::synchronous_hz() const {
  if (supply != Supply::line || !line_frequency_hz || !motor_poles) return {};
  return 2.0 * *line_frequency_hz / *motor_poles;
}

double belt_length(double driver_sheave_m, double sheave_m, double centre_distance_m) {
  const double sum = driver_sheave_m + sheave_m;
  const double difference = driver_sheave_m - sheave_m;
  if (!(driver_sheave_m > 0.0) || !(sheave_m > 0.0) || !(centre_distance_m > 0.5 * sum)) {
    throw base::usage_error("belt", "the sheaves must be above 0 and further apart than they are wide");
  }
  return 2.0 * centre_distance_m + 0.5 * std::numbers::pi * sum + difference * difference / (4.0 * centre_distance_m);
}

Support support_class(double lowest_natural_hz, double main_forcing_hz) {
  return lowest_natural_hz >= rigid_from * main_forcing_hz ? Support::rigid : Support::flexible;
}

base::Answer<Support> support_class(const base::Estimate& lowest_natural, const base::Estimate& main_forcing) {
  const double ratio = lowest_natural.value / main_forcing.value;
  const double relative = std::hypot(lowest_natural.relative().value_or(0.0), main_forcing.relative().value_or(0.0));
  const double reach = lowest_natural.u ? 2.0 * relative * ratio : doubtful * rigid_from;
  if (std::abs(ratio - rigid_from) <= reach) {
    return base::Refusal{
        "support-unknown",
        fmt::format("the lowest natural frequency is {:.3f} +- {:.3f} times the main forcing frequency, too near {} to "
                    "say rigid or flexible",
                    ratio, reach, rigid_from),
        "find the natural frequency more closely by a bump test, or judge by the stricter class (rigid)"};
  }
  return support_class(lowest_natural.value, main_forcing.value);
}

}  // namespace stillmass::machine
