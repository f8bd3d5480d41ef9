#include <cmath>

#include "stillmass/absorber/blade.hpp"
#include "stillmass/absorber/spring.hpp"
#include "stillmass/absorber/stock.hpp"
#include "stillmass/base/tables.hpp"

#include "support/catch.hpp"

using namespace stillmass::absorber;
namespace base = stillmass::base;

namespace {

using base::Key;
using base::KeyType;

/// data/tables/materials.toml and stock.toml as the absorber takes them.
Stock tabled_stock() {
  const Key materials[] = {
      {"row", KeyType::tables},
      {"row.name", KeyType::text, "", true},
      {"row.youngs_modulus_gpa", KeyType::number, "GPa", true},
      {"row.shear_modulus_gpa", KeyType::number, "GPa", true},
      {"row.density_kg_m3", KeyType::number, "kg/m3", true},
      {"row.bending_endurance_mpa", KeyType::number, "MPa", true},
      {"row.shear_endurance_mpa", KeyType::number, "MPa", true},
      {"row.source", KeyType::text, "", true},
  };
  const Key pieces[] = {
      {"row", KeyType::tables},
      {"row.shape", KeyType::text, "", true, "", "", "flat|wire"},
      {"row.width_mm", KeyType::number, "mm"},
      {"row.thickness_mm", KeyType::number, "mm"},
      {"row.diameter_mm", KeyType::number, "mm"},
      {"row.material", KeyType::text, "", true},
      {"row.source", KeyType::text, "", true},
  };
  Stock stock;
  for (const auto& row : base::table_rows("materials.toml", materials)) {
    stock.materials.push_back({*row.text("name"), 1e9 * *row.number("youngs_modulus_gpa"),
                               1e9 * *row.number("shear_modulus_gpa"), *row.number("density_kg_m3"),
                               1e6 * *row.number("bending_endurance_mpa"), 1e6 * *row.number("shear_endurance_mpa")});
  }
  for (const auto& row : base::table_rows("stock.toml", pieces)) {
    const std::string material = *row.text("material");
    if (*row.text("shape") == "flat") {
      stock.bars.push_back(
          {1e-3 * row.number("width_mm").value(), 1e-3 * row.number("thickness_mm").value(), material});
    } else {
      stock.wires.push_back({1e-3 * row.number("diameter_mm").value(), material});
    }
  }
  return stock;
}

}  // namespace

TEST_CASE("every bar and wire of the stock has a material, and every material stiffness and weight") {
  const auto stock = tabled_stock();
  REQUIRE_FALSE(stock.bars.empty());
  REQUIRE_FALSE(stock.wires.empty());
  for (const auto& bar : stock.bars) CHECK(stock.material(bar.material).bending_endurance > 0.0);
  for (const auto& wire : stock.wires) CHECK(stock.material(wire.material).shear_endurance > 0.0);
  for (const auto& material : stock.materials) {
    // Isotropic: G = E / (2 (1 + nu)) with nu of steel between 0.25 and 0.33.
    const double poisson = material.youngs_modulus / (2.0 * material.shear_modulus) - 1.0;
    CHECK(poisson > 0.25);
    CHECK(poisson < 0.33);
    CHECK(material.density == Approx(7850.0).epsilon(0.02));
  }
}

TEST_CASE("the endurances of the table are those of their sources") {
  const auto stock = tabled_stock();
  // CHECKS.md H18: cut-off 0.404 of category 160, a range; half of it is the amplitude.
  CHECK(stock.material("structural steel S355, as rolled").bending_endurance == Approx(0.5 * 64.7e6).epsilon(0.002));
  // CHECKS.md H15 (ground, 10th ed.) and H17, with the size, reliability and clamp factors that the row names.
  const double limit = 0.5 * 1300.0 * 1.58 * std::pow(1300.0, -0.085) * 0.85 * 0.814 / 2.0;
  CHECK(stock.material("spring steel, hardened to 1300 MPa, ground").bending_endurance ==
        Approx(1e6 * limit).epsilon(0.02));
  // CHECKS.md H17: Zimmerli, unpeened.
  CHECK(stock.material("drawn spring wire EN 10270-1").shear_endurance == 241e6);
}

TEST_CASE("the stock holds blades and springs for absorbers from 1 to 15 kg") {
  const auto stock = tabled_stock();
  for (const double mass : {1.0, 5.9, 15.0}) {
    for (const double frequency : {15.0, 24.6, 49.3}) {
      CAPTURE(mass, frequency);
      CHECK_FALSE(blade_options({mass, frequency, 0.004}, 0.5e-3, stock).empty());
      CHECK_FALSE(spring_options({mass, frequency, 0.004}, 0.5e-3, stock).empty());
    }
  }
}
