#include "stillmass/absorber/forcing.hpp"

namespace stillmass::absorber {

std::string_view name(Forcing forcing) {
  switch (forcing) {
    case Forcing::constant:
      return "constant";
    case Forcing::unbalance:
      return "unbalance";
    case Forcing::base:
      return "base";
    case Forcing::random:
      return "random";
  }
  return {};
}

std::optional<Forcing> forcing_named(std::string_view text) {
  for (const Forcing forcing : {Forcing::constant, Forcing::unbalance, Forcing::base, Forcing::random}) {
    if (name(forcing) == text) return forcing;
  }
  return {};
}

std::string_view name(Objective objective) { return objective == Objective::velocity ? "velocity" : "displacement"; }

std::optional<Objective> objective_named(std::string_view text) {
  for (const Objective objective : {Objective::velocity, Objective::displacement}) {
    if (name(objective) == text) return objective;
  }
  return {};
}

}  // namespace stillmass::absorber
