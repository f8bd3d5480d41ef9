#include "stillmass/machine/description.hpp"

#include <array>

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

Support support_class(double lowest_natural_hz, double main_forcing_hz) {
  return lowest_natural_hz >= 1.25 * main_forcing_hz ? Support::rigid : Support::flexible;
}

}  // namespace stillmass::machine
