#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "stillmass/machine/description.hpp"

namespace stillmass::machine {

/// How often things happen in a rolling-element bearing per turn of the inner ring, outer ring at rest, rolling without
/// slip. n elements, g = d / D cos(contact angle), d ball and D pitch diameter:
/// cage = (1 - g) / 2, outer = n (1 - g) / 2, inner = n (1 + g) / 2, spin = D / (2 d) (1 - g^2).
/// Real bearings slip: 1 to 2 % is common practice.
struct BearingOrders {
  double outer = 0.0;    ///< elements passing a point of the outer ring
  double inner = 0.0;    ///< elements passing a point of the inner ring
  double cage = 0.0;     ///< turns of the cage
  double spin = 0.0;     ///< turns of an element about its own axis
  double element = 0.0;  ///< strikes of a flaw on an element: 2 spin, it meets both rings
};

/// Throws `Error` (usage) unless elements >= 3, 0 < d < D, contact angle in [0, pi/2).
BearingOrders bearing_orders(const Bearing& bearing);

/// Geometries of data/tables/bearings.toml, each with its source there.
std::vector<Bearing> bearing_table();
std::optional<Bearing> bearing_named(std::string_view name);
/// The size of the table whose name is nearest, for an error message; empty where none is near.
std::string nearest_bearing(std::string_view name);

}  // namespace stillmass::machine
