#include "stillmass/machine/bearing.hpp"

#include <array>
#include <cmath>
#include <numbers>

#include "stillmass/base/error.hpp"
#include "stillmass/base/tables.hpp"
#include "stillmass/base/text.hpp"

namespace stillmass::machine {
namespace {

using base::KeyType;

constexpr auto keys = std::to_array<base::Key>({
    {"row", KeyType::tables, "", true, "", "one bearing", "", {}},
    {"row.name", KeyType::text, "", true, "", "size", "", {}},
    {"row.elements", KeyType::integer, "", true, "", "rolling elements", "", {3, 200}},
    {"row.ball_diameter_mm", KeyType::number, "mm", true, "", "ball diameter", "", {0.1, 1000}},
    {"row.pitch_diameter_mm", KeyType::number, "mm", true, "", "pitch diameter", "", {0.1, 10000}},
    {"row.contact_angle_deg", KeyType::number, "deg", true, "", "contact angle", "", {0, 89}},
    {"row.source", KeyType::text, "", true, "", "where the numbers come from", "", {}},
});

}  // namespace

BearingOrders bearing_orders(const Bearing& bearing) {
  const double ball = bearing.ball_diameter_m;
  const double pitch = bearing.pitch_diameter_m;
  const double angle = bearing.contact_angle_rad;
  if (bearing.elements < 3) throw base::usage_error("bearing " + bearing.name, "needs at least 3 rolling elements");
  if (!(ball > 0.0) || !(ball < pitch)) {
    throw base::usage_error("bearing " + bearing.name, "the ball must be smaller than the pitch diameter");
  }
  if (!(angle >= 0.0) || !(angle < 0.5 * std::numbers::pi)) {
    throw base::usage_error("bearing " + bearing.name, "the contact angle must lie in 0 to 90 degrees");
  }
  const double g = ball / pitch * std::cos(angle);
  const auto n = static_cast<double>(bearing.elements);
  BearingOrders orders;
  orders.cage = 0.5 * (1.0 - g);
  orders.outer = 0.5 * n * (1.0 - g);
  orders.inner = 0.5 * n * (1.0 + g);
  orders.spin = 0.5 * pitch / ball * (1.0 - g * g);
  orders.element = 2.0 * orders.spin;
  return orders;
}

std::vector<Bearing> bearing_table() {
  std::vector<Bearing> out;
  for (const base::Settings::Table& row : base::table_rows("bearings.toml", keys)) {
    Bearing& bearing = out.emplace_back();
    bearing.name = *row.text("name");
    bearing.elements = *row.integer("elements");
    bearing.ball_diameter_m = *row.number("ball_diameter_mm") / 1000.0;
    bearing.pitch_diameter_m = *row.number("pitch_diameter_mm") / 1000.0;
    bearing.contact_angle_rad = *row.number("contact_angle_deg") * std::numbers::pi / 180.0;
  }
  return out;
}

std::optional<Bearing> bearing_named(std::string_view name) {
  for (Bearing& bearing : bearing_table()) {
    if (bearing.name == name) return std::move(bearing);
  }
  return {};
}

std::string nearest_bearing(std::string_view name) {
  const std::vector<Bearing> table = bearing_table();
  std::vector<std::string_view> names;
  for (const Bearing& bearing : table) names.emplace_back(bearing.name);
  return std::string(base::nearest_name(name, names));
}

}  // namespace stillmass::machine
