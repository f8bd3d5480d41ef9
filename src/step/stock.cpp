#include <vector>

#include "stillmass/base/tables.hpp"
#include "stillmass/step/absorber.hpp"

namespace stillmass::step {
namespace {

using base::Key;
using base::KeyType;

const std::vector<Key>& material_keys() {
  static const std::vector<Key> keys = {
      {"row", KeyType::tables, "", true},
      {"row.name", KeyType::text, "", true},
      {"row.youngs_modulus_gpa", KeyType::number, "GPa", true},
      {"row.shear_modulus_gpa", KeyType::number, "GPa", true},
      {"row.density_kg_m3", KeyType::number, "kg/m3", true},
      {"row.bending_endurance_mpa", KeyType::number, "MPa", true},
      {"row.shear_endurance_mpa", KeyType::number, "MPa", true},
      {"row.source", KeyType::text, "", true},
  };
  return keys;
}

const std::vector<Key>& stock_keys() {
  static const std::vector<Key> keys = {
      {"row", KeyType::tables, "", true},         {"row.shape", KeyType::text, "", true, "", "", "flat|wire"},
      {"row.width_mm", KeyType::number, "mm"},    {"row.thickness_mm", KeyType::number, "mm"},
      {"row.diameter_mm", KeyType::number, "mm"}, {"row.material", KeyType::text, "", true},
      {"row.source", KeyType::text, "", true},
  };
  return keys;
}

}  // namespace

absorber::Stock stock() {
  absorber::Stock out;
  for (const base::Settings::Table& row : base::table_rows("materials.toml", material_keys())) {
    out.materials.push_back({*row.text("name"), *row.number("youngs_modulus_gpa") * 1e9,
                             *row.number("shear_modulus_gpa") * 1e9, *row.number("density_kg_m3"),
                             *row.number("bending_endurance_mpa") * 1e6, *row.number("shear_endurance_mpa") * 1e6});
  }
  for (const base::Settings::Table& row : base::table_rows("stock.toml", stock_keys())) {
    if (row.text("shape") == "flat") {
      out.bars.push_back({row.number("width_mm").value_or(0.0) * 1e-3, row.number("thickness_mm").value_or(0.0) * 1e-3,
                          *row.text("material")});
    } else {
      out.wires.push_back({row.number("diameter_mm").value_or(0.0) * 1e-3, *row.text("material")});
    }
  }
  return out;
}

}  // namespace stillmass::step
